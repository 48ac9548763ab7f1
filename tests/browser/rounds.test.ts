import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import {
  expectAccessible,
  expectNoSidewaysScroll,
  keepPicture,
  openBrowser,
  openPage,
  signIn,
} from '@/tests/support/browser'

let browser: Browser
beforeAll(async () => {
  browser = await openBrowser()
})
afterAll(() => browser.close())

/** Every level that the board shows, in reading order. */
const levels = async (page: Page) =>
  ((await page.locator('main').textContent())?.match(/\d{3,4} ?ppm/g) ?? []).join(' ')

/** Requests for the snapshot and for the stream that this page makes from now on. */
function watchRequests(page: Page): string[] {
  const paths: string[] = []
  page.on('request', (request) => {
    const { pathname } = new URL(request.url())
    if (pathname.startsWith('/api/v1')) paths.push(pathname)
  })
  return paths
}

describe('the operator on Rounds', () => {
  it('begins with a headline that counts, and finds every room on its floor', async () => {
    const { page, context, errors } = await openPage(browser)
    await signIn(page, 'operator')
    expect(new URL(page.url()).pathname).toBe('/rounds')
    await page
      .getByRole('heading', { level: 1, name: /^(No room needs anyone|.+ rooms? needs? someone)$/ })
      .waitFor()
    const names = await page.getByRole('heading', { level: 2 }).allTextContents()
    expect(names.filter((name) => name.endsWith('floor'))).toEqual([
      'Second floor',
      'First floor',
      'Ground floor',
    ])
    const strip = page.getByRole('region', { name: 'Need someone, most urgent first' })
    // the demo's silent sensor needs someone at every hour of the day
    await strip
      .getByText(/^no signal for/)
      .first()
      .waitFor()
    expect(await strip.getByRole('link', { name: /^Open room/ }).count()).toBe(
      await strip.getByRole('listitem').count(),
    )
    expect(errors).toEqual([])
    await context.close()
  })

  it('sees a reading arrive on the open page, in two tabs that share one stream, without reading the board again', async () => {
    const { page, context } = await openPage(browser)
    const first = watchRequests(page)
    await signIn(page, 'operator')
    await expect.poll(() => first).toContain('/api/v1/live')
    const alone = first.length
    const second = await context.newPage()
    const other = watchRequests(second)
    await second.goto('/rounds')
    await second.getByText(/^Last reading \d+ seconds? ago/).waitFor()
    await page.waitForTimeout(3000)
    expect([...first.slice(alone), ...other]).not.toContain('/api/v1/live')
    const requests = [first, other] as const
    const before = [await levels(page), await levels(second)]
    const snapshots = requests.flat().filter((path) => path === '/api/v1/rooms').length
    // the demo's sensors publish every minute over MQTT
    await expect.poll(() => levels(page), { timeout: 90_000, interval: 500 }).not.toBe(before[0])
    await expect.poll(() => levels(second), { timeout: 90_000, interval: 500 }).not.toBe(before[1])
    expect(requests.flat().filter((path) => path === '/api/v1/rooms')).toHaveLength(snapshots)
    await context.close()
  })

  it('narrows the board by address, and opens a room by the keyboard', async () => {
    const { page, context, errors } = await openPage(browser)
    await signIn(page, 'operator')
    const filter = page.getByRole('navigation', { name: 'Which rooms' })
    await filter.getByRole('link', { name: 'ground', exact: true }).click()
    await page.waitForURL(/floor=\d+/)
    await page.getByRole('heading', { name: 'Second floor' }).waitFor({ state: 'detached' })
    await filter.getByRole('link', { name: 'Weir Learning' }).click()
    await page.waitForURL(/tenancy=Weir/)
    expect(await page.getByRole('link', { name: /G\.0[3567]/ }).count()).toBeGreaterThan(0)
    expect(await page.getByRole('link', { name: /G\.04/ }).count()).toBe(0)
    const tile = page.getByRole('link', { name: /G\.05/ }).first()
    await tile.focus()
    await page.keyboard.press('Enter')
    await page.waitForURL(/\/rooms\//)
    await page.getByRole('heading', { level: 1, name: 'Weir Seminar' }).waitFor()
    expect(errors).toEqual([])
    await context.close()
  })

  it('hangs it on a wall: nothing to press, and no room of one person', async () => {
    const { page, context, errors } = await openPage(browser)
    await signIn(page, 'operator')
    await page.goto('/rounds/wall')
    await page.getByRole('heading', { level: 1 }).waitFor()
    expect(await page.locator('main').getByRole('link').count()).toBe(0)
    expect(await page.locator('main').getByRole('button').count()).toBe(0)
    expect(await page.getByRole('banner').isVisible()).toBe(false)
    const words = await page.locator('main').textContent()
    expect(words).toContain('Wheel Room')
    expect(words).not.toContain('Boiler Study')
    const snapshot = await (await page.request.get('/api/v1/rooms?wall=1')).json()
    expect(snapshot.rooms.find(({ number }: { number: string }) => number === 'G.06').live).toBeNull()
    expect(errors).toEqual([])
    await context.close()
  })
})

describe.each(['light', 'dark'] as const)('Rounds, %s', (theme) => {
  it.each(['desktop', 'phone'] as const)('is accessible and fits on a %s', async (width) => {
    const { page, context } = await openPage(browser, { width, theme })
    await signIn(page, 'operator')
    for (const path of ['/rounds', '/rounds?tiles=close', '/rooms']) {
      await page.goto(path)
      await page.getByRole('heading', { level: 1 }).waitFor()
      await expectAccessible(page)
      await expectNoSidewaysScroll(page)
    }
    await page.goto('/rounds')
    await keepPicture(page, `rounds-${width}-${theme}`)
    await context.close()
  })
})

it('a chosen theme is there before any script runs, and on every later page', async () => {
  const { page, context } = await openPage(browser)
  await signIn(page, 'operator')
  await page.locator('header summary:visible').first().click()
  await page.getByRole('radio', { name: 'dark' }).check()
  const paper = () => page.evaluate(() => getComputedStyle(document.body).backgroundColor)
  expect(await paper()).toBe('rgb(12, 29, 34)')
  const html = await (await page.request.get('/rooms')).text()
  expect(html).toContain('data-theme="dark"')
  await page.goto('/rooms')
  expect(await paper()).toBe('rgb(12, 29, 34)')
  await context.close()
})

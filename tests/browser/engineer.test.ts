import type { Browser } from 'playwright-core'
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

describe('the energy engineer', () => {
  it('begins with every room against its basis and finds the room whose supply fell to half', async () => {
    const { page, context, errors } = await openPage(browser)
    await signIn(page, 'engineer')
    expect(new URL(page.url()).pathname).toBe('/air-change')
    await page.getByRole('heading', { level: 1, name: /24 rooms against their basis/ }).waitFor()
    const changed = page.locator('tbody tr', { hasText: /fell \d+ %/ })
    expect(await changed.count()).toBeGreaterThan(0)
    await page.getByRole('link', { name: /^changed/ }).click()
    await page.waitForURL(/show=changed/)
    const halves = await page.locator('tbody tr', { hasText: /fell (4\d|5\d) %/ }).count()
    expect(halves).toBeGreaterThan(0)
    expect(errors).toEqual([])
    await context.close()
  })

  it('sorts by address and takes the table as CSV of what is shown', async () => {
    const { page, context } = await openPage(browser)
    await signIn(page, 'engineer')
    await page.getByRole('link', { name: /^Rate/ }).click()
    await page.waitForURL(/sort=rate/)
    const href = await page.getByRole('link', { name: 'CSV of what is shown' }).getAttribute('href')
    const csv = await (await page.request.get(href ?? '')).text()
    expect(csv.split('\r\n')[0]).toContain('rate_per_h')
    expect(csv.trim().split('\r\n')).toHaveLength(25)
    await context.close()
  })

  it('opens a decay, moves its window by the keyboard, sees the sentence follow, and keeps the window with a reason', async () => {
    const { page, context, errors } = await openPage(browser)
    await signIn(page, 'engineer')
    await page.goto('/decays?show=accepted')
    await page.locator('tbody a').first().click()
    const heading = page.getByRole('heading', { level: 1 })
    await heading.getByText('per hour').waitFor()
    const before = await heading.textContent()
    const start = page.getByRole('slider', { name: 'Start of the window' }).first()
    await start.focus()
    await page.keyboard.press('Shift+ArrowRight')
    await page.getByText('Ebbmark’s own fit').waitFor()
    expect(await heading.textContent()).not.toBe(before)
    await expectAccessible(page)
    await keepPicture(page, 'decay-refit-desktop-light')
    await page.getByRole('button', { name: 'Save, next decay' }).click()
    await page.getByText('Say why, in a few words').waitFor()
    await page.getByLabel('Reason').fill('the first minutes still hold people')
    const decayUrl = page.url()
    await page.getByRole('button', { name: 'Save, next decay' }).click()
    await page.waitForURL((url) => url.href !== decayUrl)
    await page.goto(decayUrl)
    await page.getByText('the first minutes still hold people').waitFor()
    expect(errors).toEqual([])
    await context.close()
  })

  it('reads why a decay was refused', async () => {
    const { page, context } = await openPage(browser)
    await signIn(page, 'engineer')
    await page.goto('/decays?show=refused')
    await page.locator('tbody a').first().click()
    await page.getByRole('heading', { level: 1, name: /^No figure for .*, because / }).waitFor()
    await context.close()
  })
})

describe.each(['light', 'dark'] as const)('air change, decays and one decay, %s', (theme) => {
  it.each(['desktop', 'phone'] as const)('are accessible and fit on a %s', async (width) => {
    const { page, context, errors } = await openPage(browser, { width, theme })
    await signIn(page, 'engineer')
    for (const [name, path] of [
      ['air-change', '/air-change'],
      ['decays', '/decays?show=all'],
    ] as const) {
      await page.goto(path)
      await expectAccessible(page)
      await expectNoSidewaysScroll(page)
      await keepPicture(page, `${name}-${width}-${theme}`)
    }
    await page.goto('/decays?show=accepted')
    await page.locator('tbody a').first().click()
    await page.getByRole('slider').first().waitFor()
    await expectAccessible(page)
    await expectNoSidewaysScroll(page)
    await keepPicture(page, `decay-${width}-${theme}`)
    expect(errors).toEqual([])
    await context.close()
  })
})

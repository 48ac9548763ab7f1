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

/** Opens a room from the list by its name. */
async function openRoom(page: Page, name: string): Promise<void> {
  await page.goto('/rooms')
  await page.getByRole('link', { name }).click()
  await page.getByRole('heading', { level: 1, name }).waitFor()
}

const wordsOf = async (page: Page) => (await page.locator('main').textContent()) ?? ''

const chart = (page: Page) => page.getByRole('group', { name: /^CO2 in/ })

describe('a room, for the operator', () => {
  it('says what it gets with interval and basis, what it can take with the caution, and shows half a year', async () => {
    const { page, context, errors } = await openPage(browser)
    await signIn(page, 'operator')
    await openRoom(page, 'Heddle')
    const words = await wordsOf(page)
    expect(words).toMatch(
      /With supply on, Heddle gets \d+(\.\d+)? air changes an hour \(\d+(\.\d+)? to \d+(\.\d+)?, from .+ on .+ days?\)/,
    )
    expect(words).toMatch(/Meets basis\.|Short of basis\.|Not proven\./)
    expect(words).toContain(
      'For ventilation only. Fire-safety and licensed occupancy limits may be lower and take precedence.',
    )
    expect(words).toContain('Ebbmark is not a gas alarm')
    await page
      .getByRole('group', { name: /^Air-change rate of Heddle by week/ })
      .locator('canvas')
      .waitFor()
    await page.getByRole('img', { name: /^Last 24 hours in Heddle/ }).waitFor()
    expect(errors).toEqual([])
    await context.close()
  })

  it('zooms by the keyboard, reads finer data for what is seen, and goes back to all of it', async () => {
    const { page, context, errors } = await openPage(browser)
    await signIn(page, 'operator')
    await openRoom(page, 'Heddle')
    await chart(page).locator('canvas').waitFor()
    await chart(page).focus()
    const finer = page.waitForResponse((response) => response.url().includes('/api/v1/readings'))
    await page.keyboard.press('+')
    const { points } = await (await finer).json()
    expect(points.length).toBeGreaterThan(100)
    expect(points.length).toBeLessThanOrEqual(1200)
    await page.getByRole('button', { name: 'Show all of it' }).click()
    await page.getByRole('button', { name: 'Show all of it' }).waitFor({ state: 'detached' })
    await page.getByRole('link', { name: '24 hours' }).click()
    await page.waitForURL(/range=24h/)
    const rows = page.getByRole('table', { name: 'CO2 by stretches of time' }).getByRole('row')
    const opened = async () => {
      // the chart of the other range may still take the place of this one
      await page
        .locator('details', { hasText: 'Read as a table' })
        .first()
        .evaluate((details) => details.setAttribute('open', ''))
      return rows.count()
    }
    await expect.poll(opened).toBeGreaterThan(12)
    expect(errors).toEqual([])
    await context.close()
  })

  it('answers a room that is not there like one that is not theirs', async () => {
    const { page, context } = await openPage(browser)
    await signIn(page, 'operator')
    expect((await page.goto('/rooms/nowhere'))?.status()).toBe(404)
    await page.getByRole('heading', { name: 'There is nothing here' }).waitFor()
    await context.close()
  })
})

describe('rooms, for the tenant', () => {
  it('are the own ones, in people and minutes; one person’s room shows weekly figures alone', async () => {
    const { page, context, errors } = await openPage(browser)
    await signIn(page, 'tenant')
    await page.goto('/rooms')
    const list = await wordsOf(page)
    expect(list).toContain('Loom Hall')
    expect(list).not.toContain('Heddle')
    await openRoom(page, 'Loom Hall')
    expect(await wordsOf(page)).not.toMatch(/air.change|\bACH\b|1\/h|decay/i)
    await openRoom(page, 'Boiler Study')
    const own = await wordsOf(page)
    expect(own).toContain('weekly figures only')
    expect(await page.locator('canvas').count()).toBe(0)
    const address = new URL(page.url()).pathname.split('/').at(-1) ?? ''
    const span = 'from=2026-01-01T00:00:00Z&to=2026-01-02T00:00:00Z'
    expect((await page.request.get(`/api/v1/readings?room=${address}&${span}`)).status()).toBe(403)
    expect(errors).toEqual([])
    await context.close()
  })

  it('of others are not there', async () => {
    const { page, context } = await openPage(browser)
    await signIn(page, 'operator')
    await openRoom(page, 'Heddle')
    const { pathname } = new URL(page.url())
    await context.clearCookies()
    await signIn(page, 'tenant')
    expect((await page.goto(pathname))?.status()).toBe(404)
    expect((await page.request.get(`/api/v1${pathname}`)).status()).toBe(404)
    await context.close()
  })
})

describe.each(['light', 'dark'] as const)('a room, %s', (theme) => {
  it.each(['desktop', 'phone'] as const)('is accessible and fits on a %s', async (width) => {
    const { page, context } = await openPage(browser, { width, theme })
    await signIn(page, 'operator')
    await openRoom(page, 'Heddle')
    await chart(page).locator('canvas').waitFor()
    await expectAccessible(page)
    await expectNoSidewaysScroll(page)
    await keepPicture(page, `room-${width}-${theme}`)
    await context.close()
  })
})

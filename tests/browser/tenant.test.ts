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

describe('the tenant representative', () => {
  it('reads the week in plain words, and never meets the words of the trade', async () => {
    const { page, context, errors } = await openPage(browser)
    await signIn(page, 'tenant')
    expect(new URL(page.url()).pathname).toBe('/digests')
    await page.locator('tbody a').first().click()
    await page
      .getByText(
        'For ventilation only. Fire-safety and licensed occupancy limits may be lower and take precedence.',
      )
      .waitFor()
    const words = (await page.locator('main').textContent()) ?? ''
    expect(words).not.toMatch(/air.change|1\/h|\bACH\b|decay/i)
    expect(await page.getByRole('button', { name: 'Send now' }).count()).toBe(0)
    expect(errors).toEqual([])
    await context.close()
  })

  it('is not let near what belongs to others', async () => {
    const { page, context } = await openPage(browser)
    await signIn(page, 'tenant')
    for (const path of ['/rounds', '/air-change', '/decays', '/sensors', '/sensors/register']) {
      const answer = await page.goto(path)
      expect(answer?.status(), path).toBe(403)
    }
    await context.close()
  })
})

describe('the operator', () => {
  it('sends the letter now, and it arrives in the local mailbox', async () => {
    const { page, context, errors } = await openPage(browser)
    await signIn(page, 'operator')
    await page.goto('/digests')
    await page.locator('tbody tr', { hasText: 'Weir Learning' }).getByRole('link').first().click()
    const title = (await page.getByRole('heading', { level: 1 }).textContent()) ?? ''
    await page.getByRole('button', { name: 'Send now' }).click()
    await page.getByText(/^On its way to/).waitFor()
    await expect
      .poll(
        async () => {
          await page.goto('/mailbox')
          return page.locator('main').textContent()
        },
        { timeout: 30_000 },
      )
      .toContain('weir-learning.example')
    expect(title.length).toBeGreaterThan(10)
    expect(errors).toEqual([])
    await context.close()
  })
})

describe.each(['light', 'dark'] as const)('the letter, %s', (theme) => {
  it.each(['desktop', 'phone'] as const)('is accessible and fits on a %s', async (width) => {
    const { page, context } = await openPage(browser, { width, theme })
    await signIn(page, 'tenant')
    await expectAccessible(page)
    await expectNoSidewaysScroll(page)
    await page.locator('tbody a').first().click()
    await page.getByRole('heading', { level: 1 }).waitFor()
    await expectAccessible(page)
    await expectNoSidewaysScroll(page)
    await keepPicture(page, `digest-${width}-${theme}`)
    await context.close()
  })
})

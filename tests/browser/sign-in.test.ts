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

describe.each(['light', 'dark'] as const)('the sign-in page, %s', (theme) => {
  it.each(['desktop', 'phone'] as const)('is accessible and fits on a %s', async (width) => {
    const { page, context, errors } = await openPage(browser, { width, theme })
    await page.goto('/sign-in')
    await page.getByRole('heading', { level: 1, name: 'Sign in' }).waitFor()
    await expectAccessible(page)
    await expectNoSidewaysScroll(page)
    await keepPicture(page, `sign-in-${width}-${theme}`)
    expect(errors).toEqual([])
    await context.close()
  })
})

describe('signing in', () => {
  it('says what is wrong at the field, keeps the e-mail, and works by keyboard alone', async () => {
    const { page, context } = await openPage(browser)
    await page.goto('/sign-in?next=/decays')
    await page.getByLabel('E-mail').focus()
    await page.keyboard.type('someone@sallow-mill.example')
    await page.keyboard.press('Tab')
    await page.keyboard.type('not the password')
    await page.keyboard.press('Enter')
    await page.getByRole('alert').getByText('E-mail and password do not go together.').waitFor()
    expect(await page.getByLabel('E-mail').inputValue()).toBe('someone@sallow-mill.example')
    expect(await page.getByLabel('Password').inputValue()).toBe('')
    expect(await page.getByLabel('Password').getAttribute('aria-invalid')).toBe('true')
    await expectAccessible(page)
    await page.getByLabel('E-mail').fill('someone')
    await page.getByRole('button', { name: 'Sign in', exact: true }).click()
    await page.getByText('This is not an e-mail address').waitFor()
    await context.close()
  })

  it.each([
    ['Operator Ines Marlowe', '/rounds'],
    ['Energy engineer Tobias Renn', '/air-change'],
    ['Tenant Amara Holt', '/digests'],
    ['Installer Piet Lindqvist', '/sensors'],
    ['Administrator Ruth Calloway', '/rounds'],
  ])('the demo’s “%s” opens %s', async (name, path) => {
    const { page, context } = await openPage(browser)
    await page.goto('/sign-in')
    await page.getByRole('button', { name }).click()
    await page.waitForURL((url) => url.pathname === path)
    await context.close()
  })

  it('leads back to the page that asked for it, and out again', async () => {
    const { page, context } = await openPage(browser)
    await page.goto('/air-change?sort=rate')
    expect(new URL(page.url()).pathname).toBe('/sign-in')
    await page.getByRole('button', { name: 'Energy engineer Tobias Renn' }).click()
    await page.waitForURL(/\/air-change\?sort=rate$/)
    await page.getByText('Tobias Renn').first().click()
    await page.getByRole('button', { name: 'Sign out', exact: true }).click()
    await page.waitForURL((url) => url.pathname === '/sign-in')
    await page.goto('/air-change')
    expect(new URL(page.url()).pathname).toBe('/sign-in')
    await context.close()
  })

  it('shows a person of other work the way to their own', async () => {
    const { page, context } = await openPage(browser)
    await signIn(page, 'tenant')
    await page.goto('/air-change')
    await page.getByRole('heading', { level: 1, name: 'This page is for other work than yours' }).waitFor()
    await expectAccessible(page)
    await page.getByRole('link', { name: 'Go to where your work begins' }).click()
    await page.waitForURL((url) => url.pathname === '/digests')
    await context.close()
  })
})

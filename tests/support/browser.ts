import fs from 'node:fs'
import path from 'node:path'
import AxeBuilder from '@axe-core/playwright'
import { type Browser, type BrowserContext, chromium, type Page } from 'playwright-core'
import { expect, inject } from 'vitest'

export const WIDTHS = { desktop: { width: 1440, height: 900 }, phone: { width: 390, height: 844 } } as const

const flags = [
  '--no-sandbox',
  '--disable-dev-shm-usage',
  '--disable-gpu',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
]

/** One Chromium for a test file. */
export function openBrowser(): Promise<Browser> {
  return chromium.launch({ executablePath: process.env.TEST_CHROMIUM ?? '/usr/bin/chromium', args: flags })
}

type Look = { width?: keyof typeof WIDTHS; theme?: 'light' | 'dark' }

/** A person's own browser window. Console errors and failed page scripts are collected, to be expected empty. */
export async function openPage(
  browser: Browser,
  look: Look = {},
): Promise<{ page: Page; context: BrowserContext; errors: string[] }> {
  const context = await browser.newContext({
    baseURL: inject('stack').webUrl,
    viewport: WIDTHS[look.width ?? 'desktop'],
    colorScheme: look.theme ?? 'light',
    reducedMotion: 'reduce',
  })
  const page = await context.newPage()
  const errors: string[] = []
  page.on('console', (message) => message.type() === 'error' && errors.push(message.text()))
  page.on('pageerror', (error) => errors.push(String(error)))
  return { page, context, errors }
}

export type DemoRole = 'operator' | 'engineer' | 'tenant' | 'installer' | 'admin'

/** Signs in as one of the demo's people, on the sign-in page, by e-mail and password. */
export async function signIn(page: Page, role: DemoRole): Promise<void> {
  const file = path.join(inject('stack').dataDir, 'demo-people.json')
  const { password, people } = JSON.parse(fs.readFileSync(file, 'utf8')) as {
    password: string
    people: { email: string }[]
  }
  const person = people.find(({ email }) => email.startsWith(role))
  if (!person) throw new Error(`The demo has no ${role}.`)
  await page.goto('/sign-in')
  await page.getByLabel('E-mail').fill(person.email)
  await page.getByLabel('Password').fill(password)
  await page.getByRole('button', { name: 'Sign in', exact: true }).click()
  await page.waitForURL((url) => !url.pathname.startsWith('/sign-in'))
}

/** No accessibility violation of WCAG 2.2 A and AA on the page as it stands. */
export async function expectAccessible(page: Page): Promise<void> {
  const { violations } = await new AxeBuilder({ page })
    .withTags(['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'])
    .analyze()
  expect(
    violations.map(({ id, nodes }) => `${id}: ${nodes.map((node) => node.target.join(' ')).join('; ')}`),
  ).toEqual([])
}

/** Nothing on the page scrolls sideways. */
export async function expectNoSidewaysScroll(page: Page): Promise<void> {
  const wide = await page.evaluate(
    () => document.documentElement.scrollWidth - document.documentElement.clientWidth,
  )
  expect(wide).toBeLessThanOrEqual(0)
}

/** A picture for whoever wants to look, under tests/.out/screens. */
export async function keepPicture(page: Page, name: string): Promise<void> {
  fs.mkdirSync('tests/.out/screens', { recursive: true })
  await page.screenshot({ path: `tests/.out/screens/${name}.png`, fullPage: true })
}

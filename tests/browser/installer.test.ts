import mqtt from 'mqtt'
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest'
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

const shownValue = (page: Page, label: string) =>
  page.getByText(label, { exact: true }).locator('xpath=following-sibling::p').textContent()

describe('the installer on a phone', () => {
  it('registers a sensor, is shown its secret once, and sees its first reading arrive', async () => {
    const { page, context, errors } = await openPage(browser, { width: 'phone' })
    await signIn(page, 'installer')
    expect(new URL(page.url()).pathname).toBe('/sensors')
    await page.goto('/sensors/register')
    await page.getByLabel('Code on the sensor').fill('EM-TEST-1')
    await page.getByRole('button', { name: 'Continue to place' }).click()
    await page.getByLabel('Room', { exact: true }).last().selectOption({ index: 1 })
    await page.getByLabel('Where exactly').fill('shelf, by the window')
    await expectAccessible(page)
    await page.getByRole('button', { name: 'Save and listen' }).click()
    await page.getByText('shown this once').waitFor()
    await keepPicture(page, 'register-listen-phone')
    await expectNoSidewaysScroll(page)
    const secret = (await shownValue(page, 'Secret (MQTT password)')) ?? ''
    const topic = (await shownValue(page, 'Topic, QoS 1')) ?? ''
    expect(topic).toMatch(/^ebbmark\/v1\/[a-z-]+\/EM-TEST-1\/readings$/)
    const client = await mqtt.connectAsync(`mqtt://127.0.0.1:${inject('stack').mqttPort}`, {
      clientId: 'EM-TEST-1',
      username: 'EM-TEST-1',
      password: secret,
    })
    await client.publishAsync(topic, JSON.stringify({ co2_ppm: 777, temp_c: 21.5 }), { qos: 1 })
    await client.endAsync()
    await page.getByText('first reading heard').waitFor({ timeout: 15_000 })
    await page.getByText('777').first().waitFor()
    await expectAccessible(page)
    await page.reload()
    expect(await page.getByText(secret).count()).toBe(0)
    expect(errors).toEqual([])
    await context.close()
  })

  it('keeps what was entered when the page is left before saving', async () => {
    const { page, context } = await openPage(browser, { width: 'phone' })
    await signIn(page, 'installer')
    await page.goto('/sensors/register')
    await page.getByLabel('Code on the sensor').fill('EM-DRAFT-9')
    await page.reload()
    await expect.poll(() => page.getByLabel('Code on the sensor').inputValue()).toBe('EM-DRAFT-9')
    await context.close()
  })

  it('is told the remedy when an id cannot be taken, in words that do not say whose it is', async () => {
    const { page, context } = await openPage(browser)
    await signIn(page, 'installer')
    await page.goto('/sensors')
    const taken = await page.locator('tbody td:nth-child(2)').first().textContent()
    await page.goto('/sensors/register')
    await page.getByLabel('Code on the sensor').fill(taken?.toLowerCase() ?? '')
    await page.getByLabel('Room', { exact: true }).last().selectOption({ index: 1 })
    await page.getByLabel('Where exactly').fill('wall')
    await page.getByRole('button', { name: 'Save and listen' }).click()
    await page.getByText('cannot be registered here').first().waitFor()
    await context.close()
  })
})

describe.each(['light', 'dark'] as const)('the sensors list, %s', (theme) => {
  it.each(['desktop', 'phone'] as const)('is accessible and fits on a %s', async (width) => {
    const { page, context, errors } = await openPage(browser, { width, theme })
    await signIn(page, 'installer')
    await page.getByRole('heading', { level: 1 }).waitFor()
    await expectAccessible(page)
    await expectNoSidewaysScroll(page)
    await keepPicture(page, `sensors-${width}-${theme}`)
    expect(errors).toEqual([])
    await context.close()
  })
})

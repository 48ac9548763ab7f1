import mqtt from 'mqtt'
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
import { type Mosquitto, startMosquitto } from '@/tests/support/mosquitto'

let browser: Browser
let broker: Mosquitto
let speaking: NodeJS.Timeout
let client: mqtt.MqttClient
const topicOf = (deviceId: string) => `plant/up/${deviceId}`
let deviceId = ''

beforeAll(async () => {
  browser = await openBrowser()
  broker = await startMosquitto({ passwords: { reader: 'lock gate', plant: 'p' } })
  client = await mqtt.connectAsync(`mqtt://127.0.0.1:${broker.port}`, { username: 'plant', password: 'p' })
  // half a second beside the demo's own readings of the sensor
  speaking = setInterval(() => {
    const time = Math.floor(Date.now() / 1000) + 0.5 - 3600
    for (const each of [deviceId, 'unknown-7'].filter(Boolean))
      client.publish(topicOf(each), JSON.stringify({ time, gas: { co2: 0.0613, t: 214 } }), { qos: 1 })
  }, 300)
})
afterAll(async () => {
  clearInterval(speaking)
  await client?.endAsync(true)
  await broker?.remove()
  await browser?.close()
})

describe('the administrator', () => {
  it('describes a feed, sees what would be stored, keeps it, switches it on and off', async () => {
    const { page, context, errors } = await openPage(browser)
    await signIn(page, 'admin')
    await page.goto('/sensors')
    deviceId = (await page.locator('tbody td:nth-child(2)').first().textContent()) ?? ''
    await page.getByRole('navigation').getByRole('link', { name: 'Feeds' }).first().click()
    await page.getByRole('link', { name: 'Describe a feed' }).click()
    await page.getByRole('button', { name: 'Keep it, switched off' }).click()
    await page.getByText('Say what it is').waitFor()
    await expectAccessible(page)
    await page.getByLabel('Name', { exact: true }).fill('gas desk')
    await page.getByLabel('Broker').fill(`mqtt://127.0.0.1:${broker.port}`)
    await page.getByLabel('User name').fill('reader')
    await page.getByLabel('Password').fill('wrong')
    await page.getByLabel('Topics').fill('plant/up/+')
    await page.getByLabel('Level of the topic').fill('3')
    await page.getByLabel('Time stands at').fill('/time')
    await page.getByLabel('CO2 stands at').fill('/gas/co2')
    await page.getByLabel('CO2 unit').selectOption('percent by volume')
    await page.getByRole('button', { name: 'Try it' }).click()
    await page.getByText('The broker did not let Ebbmark in').waitFor({ timeout: 20_000 })
    await page.getByLabel('Password').fill('lock gate')
    await page.getByRole('button', { name: 'Try it' }).click()
    await page.getByText('nothing was stored').waitFor({ timeout: 20_000 })
    await page.getByText('would be stored').first().waitFor()
    await page.getByText('is not registered in this building').first().waitFor()
    expect(await page.getByText('613 ppm').count()).toBeGreaterThan(0)
    await expectAccessible(page)
    await keepPicture(page, 'feed-trial')
    await page.getByRole('button', { name: 'Keep it, switched off' }).click()
    await page.getByRole('heading', { level: 1, name: 'gas desk' }).waitFor()
    await page.getByText('Switched off. Nothing of it is stored.').waitFor()
    expect(await page.content()).not.toContain('lock gate')
    await page.getByRole('button', { name: 'Switch it on' }).click()
    await page.getByRole('button', { name: 'Switch it off' }).waitFor()
    await expect
      .poll(
        async () => {
          await page.reload()
          return page.getByText('unknown-7').count()
        },
        { timeout: 30_000, interval: 1000 },
      )
      .toBe(1)
    await page.getByText('Connected for').waitFor()
    await expectAccessible(page)
    await keepPicture(page, 'feed')
    await page.getByRole('button', { name: 'Switch it off' }).click()
    await page.getByText('Switched off. Nothing of it is stored.').waitFor()
    expect(errors).toEqual([])
    await context.close()
  })

  it.each(['phone', 'desktop'] as const)('finds the feeds on a %s', async (width) => {
    const { page, context } = await openPage(browser, { width, theme: width === 'phone' ? 'dark' : 'light' })
    await signIn(page, 'admin')
    for (const address of ['/settings/feeds', '/settings/feeds/new']) {
      await page.goto(address)
      await expectAccessible(page)
      await expectNoSidewaysScroll(page)
      await keepPicture(page, `${address.slice(1).replaceAll('/', '-')}-${width}`)
    }
    await page.goto('/settings/feeds')
    await page.getByRole('link', { name: 'gas desk' }).click()
    await page.getByRole('heading', { level: 1, name: 'gas desk' }).waitFor()
    await expectAccessible(page)
    await expectNoSidewaysScroll(page)
    await context.close()
  })

  it('takes a feed away by its name', async () => {
    const { page, context } = await openPage(browser)
    await signIn(page, 'admin')
    await page.goto('/settings/feeds')
    await page.getByRole('link', { name: 'gas desk' }).click()
    await page.getByLabel('Type gas desk to take it away').fill('gas')
    await page.getByRole('button', { name: 'Take it away' }).click()
    await page.getByText('Type gas desk to confirm.').waitFor()
    await page.getByLabel('Type gas desk to take it away').fill('gas desk')
    await page.getByRole('button', { name: 'Take it away' }).click()
    await page.waitForURL((url) => url.pathname === '/settings/feeds')
    expect(await page.getByRole('link', { name: 'gas desk' }).count()).toBe(0)
    await context.close()
  })
})

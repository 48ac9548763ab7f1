import mqtt from 'mqtt'
import type { Browser } from 'playwright-core'
import { afterAll, beforeAll, expect, inject, it } from 'vitest'
import { demoKey, sensorSecret } from '@/ingest/simulator/demo-files'
import { openBrowser, openPage, signIn } from '@/tests/support/browser'

/** The demo's silent sensor: nobody else publishes for it. */
const deviceId = 'sm-105'

let browser: Browser
beforeAll(async () => {
  browser = await openBrowser()
})
afterAll(() => browser.close())

async function publish(co2Ppm: number): Promise<void> {
  const { mqttPort, dataDir } = inject('stack')
  const client = await mqtt.connectAsync(`mqtt://127.0.0.1:${mqttPort}`, {
    clientId: deviceId,
    username: deviceId,
    password: sensorSecret(demoKey(dataDir), deviceId),
  })
  await client.publishAsync(
    `ebbmark/v1/sallow-mill/${deviceId}/readings`,
    JSON.stringify({ t: Date.now(), co2_ppm: co2Ppm }),
    { qos: 1 },
  )
  await client.endAsync()
}

it('a published reading changes the open tile while the page may fetch nothing', async () => {
  const { page, context, errors } = await openPage(browser)
  await signIn(page, 'operator')
  await page.goto('/rounds')
  const tile = page.getByRole('link', { name: /Shuttle/ }).first()
  await tile.waitFor()
  await page.getByText('no signal for', { exact: false }).first().waitFor()
  // neither the snapshot nor the page itself can be had again: what changes now came through the stream
  await page.route(/\/api\/v1\/rooms|\/rounds/, (route) => route.abort())
  await publish(913)
  await page.getByText('913').first().waitFor({ timeout: 20_000 })
  await publish(947)
  await page.getByText('947').first().waitFor({ timeout: 20_000 })
  expect(errors.filter((error) => !error.includes('ERR_FAILED'))).toEqual([])
  await context.close()
})

it('two tabs of one browser share one stream', async () => {
  const { page, context } = await openPage(browser)
  await signIn(page, 'operator')
  const leads = page.waitForRequest(/\/api\/v1\/live/)
  await page.goto('/rounds')
  await leads
  const other = await context.newPage()
  const streams: string[] = []
  other.on('request', (request) => request.url().includes('/api/v1/live') && streams.push(request.url()))
  await other.goto('/rounds')
  await other.getByRole('heading', { level: 1 }).waitFor()
  await publish(871)
  await Promise.all([page, other].map((each) => each.getByText('871').first().waitFor({ timeout: 20_000 })))
  expect(streams).toEqual([])
  await context.close()
})

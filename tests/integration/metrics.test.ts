import fs from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { sql } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest'
import { queueJob } from '@/db/changes/jobs'
import { diskSays, diskStateOf } from '@/lib/server/disk'
import { admitToMetrics } from '@/lib/server/metrics/access'
import { connectSensor, makeSite, publish, startBroker } from '@/tests/support/broker'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'

/** A real broker takes readings and refusals; what it says in its heartbeat and what the database holds must stand in the text. */
let test: TestDatabase
const dataDir = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-metrics-'))

beforeAll(async () => {
  test = await createTestDatabase()
  vi.stubEnv('DATABASE_URL', test.appUrl)
  vi.stubEnv('EBBMARK_DATA_DIR', dataDir)
  vi.stubEnv('EBBMARK_DISK_TIGHT_PCT', '90')
  vi.stubEnv('EBBMARK_DISK_FULL_PCT', '0')
})
afterAll(async () => {
  const { database } = await import('@/lib/server/database')
  await database().close()
  await test.drop()
  fs.rmSync(dataDir, { recursive: true, force: true })
  vi.unstubAllEnvs()
})

type Samples = Map<string, number>
async function scrape(): Promise<{ samples: Samples; text: string }> {
  const { metricsText } = await import('@/lib/server/metrics/metrics')
  const { text } = await metricsText()
  const lines = text.split('\n').filter((line) => line !== '' && !line.startsWith('#'))
  const samples = new Map(
    lines.map((line) => [
      line.slice(0, line.lastIndexOf(' ')),
      Number(line.slice(line.lastIndexOf(' ') + 1)),
    ]),
  )
  // the event loop's figures of a process that has just begun are not numbers yet
  for (const [name, value] of samples) if (name.startsWith('ebbmark_')) expect(value, name).not.toBeNaN()
  return { samples, text }
}

it('tells what ingest took, refused and how far the rest is, and names nobody', async () => {
  const broker = await startBroker({ appUrl: test.appUrl })
  const site = await makeSite(test.database, 'secret-mill')
  const speaking = await site.addSensor('secret-device-1')
  await site.addSensor('secret-device-2')
  const client = await connectSensor(broker.port, speaking)
  for (let k = 0; k < 20; k++)
    await publish(client, speaking.topic, { t: Date.now() - k * 1000, co2_ppm: 600 + k })
  await publish(client, speaking.topic, 'no JSON at all')
  await publish(client, speaking.topic, { co2_ppm: 90_000 })
  await test.database.asSystem('test', (tx) =>
    queueJob(tx, { task: 'watch-sensors', payload: { buildingId: site.buildingId } }),
  )
  // the broker beats every 10 s
  let seen = await scrape()
  for (let tries = 0; tries < 100 && seen.samples.get('ebbmark_ingest_readings_total') !== 20; tries++) {
    await new Promise((resolve) => setTimeout(resolve, 200))
    seen = await scrape()
  }
  const { samples, text } = seen
  expect(samples.get('ebbmark_ingest_readings_total')).toBe(20)
  expect(samples.get('ebbmark_ingest_refusals_total')).toBe(2)
  expect(samples.get('ebbmark_ingest_messages_total')).toBe(22)
  expect(samples.get('ebbmark_ingest_batches_total')).toBeGreaterThanOrEqual(1)
  expect(samples.get('ebbmark_ingest_commit_seconds_total')).toBeGreaterThan(0)
  expect(samples.get('ebbmark_ingest_last_batch_rows')).toBe(1)
  expect(samples.get('ebbmark_ingest_connections')).toBe(1)
  const refused = [...samples].filter(([name]) => name.startsWith('ebbmark_refused_last_day{'))
  expect(refused.map(([, count]) => count).reduce((a, b) => a + b, 0)).toBe(2)
  expect(refused).toHaveLength(2)
  expect(samples.get('ebbmark_sensors{standing="sound"}')).toBe(1)
  expect(samples.get('ebbmark_sensors{standing="awaiting first reading"}')).toBe(1)
  expect(samples.get('ebbmark_sensors{standing="silent"}')).toBe(0)
  expect(samples.get('ebbmark_last_reading_age_seconds')).toBeLessThan(60)
  expect(samples.get('ebbmark_jobs{state="waiting"}')).toBe(1)
  expect(samples.get('ebbmark_workers{kind="broker"}')).toBe(1)
  expect(samples.get('ebbmark_health{part="broker"}')).toBe(1)
  expect(samples.get('ebbmark_readings_bytes')).toBeGreaterThan(8192)
  expect(samples.get('process_resident_memory_bytes')).toBeGreaterThan(1e6)
  expect(text).not.toMatch(/secret|mill|Owner of/)
  client.end(true)
  await broker.end('SIGTERM')
  const after = (await scrape()).samples
  expect(after.get('ebbmark_ingest_readings_total')).toBe(0)
  expect(after.get('ebbmark_health{part="broker"}')).toBe(0)
})

it('counts a sensor as silent and retired as the sensor list does', async () => {
  await test.database.asSystem('test', async (tx) => {
    await tx.execute(
      sql`UPDATE latest_readings SET at = at - interval '1 hour', received_at = received_at - interval '1 hour'`,
    )
    await tx.execute(sql`UPDATE sensors SET retired_at = now() WHERE device_id = 'secret-device-2'`)
  })
  const { samples } = await scrape()
  expect(samples.get('ebbmark_sensors{standing="silent"}')).toBe(1)
  expect(samples.get('ebbmark_sensors{standing="retired"}')).toBe(1)
  expect(samples.get('ebbmark_sensors{standing="sound"}')).toBe(0)
})

it('a tight disk is told in health and metrics and is still well', async () => {
  const { currentHealth } = await import('@/lib/server/health')
  const { disk } = (await currentHealth()).parts
  expect(disk).toMatchObject({ well: true, state: 'tight' })
  const { samples } = await scrape()
  expect(samples.get('ebbmark_disk_tight')).toBe(1)
  const { bavail, bsize } = fs.statfsSync(dataDir)
  expect(samples.get('ebbmark_disk_free_bytes')! / (bavail * bsize)).toBeCloseTo(1, 1)
  const thresholds = { tightPct: 15, fullPct: 5 }
  expect([20, 15, 14.9, 5, 4.9].map((pct) => diskStateOf(pct, thresholds))).toEqual([
    ...['ample', 'ample', 'tight', 'tight', 'full'],
  ])
  expect(diskSays({ state: 'tight', freeBytes: 12.3e9, totalBytes: 100e9, freePct: 12.3 })).toBe(
    'tight: 12.3 GB free (12 %)',
  )
})

describe('who may read them', () => {
  const here = { token: undefined, host: '127.0.0.1', publicUrl: 'http://127.0.0.1:3000' }
  const token = 'a token of twenty signs or more'.replaceAll(' ', '-')
  it.each([
    ['this machine without a token', here, null, true],
    [
      'anyone of a server that others reach',
      { ...here, host: '0.0.0.0', publicUrl: 'https://air.example' },
      null,
      false,
    ],
    ['anyone through a proxy on this machine', { ...here, publicUrl: 'https://air.example' }, null, false],
    [
      'through a proxy with the token',
      { ...here, token, publicUrl: 'https://air.example' },
      `Bearer ${token}`,
      true,
    ],
    ['with a wrong token, also here', { ...here, token }, 'Bearer wrong', false],
    ['with a token where none is set', here, `Bearer ${token}`, false],
  ])('%s: %#', (_, access, authorization, passes) => {
    const admit = () => admitToMetrics(authorization, access)
    if (passes) expect(admit).not.toThrow()
    else expect(admit).toThrow(/EBBMARK_METRICS_TOKEN/)
  })
})

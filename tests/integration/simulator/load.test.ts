import fs from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { isDeviceSecret } from '@/db/device-secret'
import { demoKey, sensorSecret } from '@/ingest/simulator/demo-files'
import { forEachReading, makeHistory } from '@/ingest/simulator/history'
import { type SeedDemoOptions, seedDemo } from '@/ingest/simulator/load'
import { sallowMill } from '@/ingest/simulator/scenario'
import { makeWorld } from '@/ingest/simulator/world'
import { rows } from '@/tests/support/broker'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'

const DAY_S = 86400
const HISTORY_S = 9 * DAY_S
const firstStart = new Date('2026-12-01T14:03:20Z')

let db: TestDatabase
let dataDir: string
beforeAll(async () => {
  db = await createTestDatabase()
  dataDir = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-demo-'))
})
afterAll(async () => {
  await db?.drop()
  fs.rmSync(dataDir, { recursive: true, force: true })
})

const seed = (now: Date, more: Partial<SeedDemoOptions> = {}) =>
  seedDemo({ database: db.database, dataDir, now, historyS: HISTORY_S, ...more })

/** What the generator makes up to an instant, run in one go: what the table must hold, whatever happened in between. */
function generated(until: Date): string[] {
  const firstStartS = firstStart.getTime() / 1000
  const world = makeWorld(sallowMill, { seed: 1, firstStartS, historyS: HISTORY_S })
  const made: string[] = []
  for (const batch of makeHistory(world, { toS: until.getTime() / 1000 }))
    forEachReading(batch, (s, t, co2) => made.push(`${sallowMill.sensors[s]!.deviceId} ${t} ${co2}`))
  return made.sort()
}

/** The table against what it must hold: the first line in which they differ, if any. */
async function firstDifference(until: Date): Promise<unknown> {
  const found = await rows<{ line: string }>(
    db.database,
    `SELECT s.device_id || ' ' || extract(epoch FROM r.at)::int || ' ' || r.co2_ppm AS line
     FROM readings r JOIN sensors s ON s.id = r.sensor_id`,
  )
  const stored = found.map((row) => row.line).sort()
  const wanted = generated(until)
  const at = wanted.findIndex((line, i) => line !== stored[i])
  if (at === -1 && stored.length === wanted.length) return undefined
  return { wanted: wanted[at], stored: stored[at], of: [wanted.length, stored.length] }
}

const one = async <T>(text: string) => (await rows<{ v: T }>(db.database, text))[0]!.v

it('goes on where a first start was cut off, and holds then what it would have held', async () => {
  let said = 0
  const cut = seed(firstStart, {
    say: () => {
      said += 1
      if (said === 2) throw new Error('the power went')
    },
  })
  await expect(cut).rejects.toThrow('the power went')
  const before = await one<number>('SELECT count(*)::int AS v FROM readings')
  expect(before).toBeGreaterThan(8 * 1440 * 29)

  const later = new Date(firstStart.getTime() + 150_000)
  const again = await seed(later)
  expect(again.isNew).toBe(false)
  expect(again.readingsAdded).toBeGreaterThan(0)
  expect(await firstDifference(later)).toBeUndefined()
})

it('changes nothing when run again in the same minute, also by two at once', async () => {
  const later = new Date(firstStart.getTime() + 155_000)
  const results = await Promise.all([seed(later), seed(later)])
  expect(results.map((r) => r.readingsAdded)).toEqual([0, 0])
  expect(results[0]!.state).toEqual(results[1]!.state)
})

it('fills two days in which nothing ran, without a gap, and marks the hours that came late', async () => {
  const daysLater = new Date(firstStart.getTime() + 2 * DAY_S * 1000 + 41_000)
  const result = await seed(daysLater)
  expect(await firstDifference(daysLater)).toBeUndefined()
  expect(result.filledToS).toBe(Math.floor(daysLater.getTime() / 60_000) * 60)
  const late = await one<number>('SELECT count(*)::int AS v FROM late_readings')
  expect(late).toBeGreaterThanOrEqual(2 * 24 - 1)
  // only the silent sensor's newest reading is old
  const old = await rows<{ device: string }>(
    db.database,
    `SELECT s.device_id AS device FROM latest_readings l JOIN sensors s ON s.id = l.sensor_id
     WHERE l.at < to_timestamp(${result.filledToS}) - interval '90 minutes'`,
  )
  expect(old.map((row) => row.device)).toEqual(['sm-105'])
})

it('builds one organisation with 24 rooms, four tenancies, five air handlers and thirty placed sensors', async () => {
  const count = (table: string, where = 'true') =>
    one<number>(`SELECT count(*)::int AS v FROM ${table} WHERE ${where}`)
  expect(await count('organizations', 'is_demo')).toBe(1)
  expect(await count('buildings', `slug = 'sallow-mill' AND time_zone = 'Europe/London'`)).toBe(1)
  expect(await count('rooms', `kind = 'room'`)).toBe(24)
  expect(await count('rooms', `kind = 'room' AND single_person`)).toBe(2)
  expect(await count('floors')).toBe(3)
  expect(await count('tenancies')).toBe(4)
  expect(await count('air_handlers')).toBe(5)
  expect(await count('placements', 'to_at IS NULL')).toBe(30)
  expect(await count('placements', `lead AND position = 'room'`)).toBe(24)
  expect(await count('room_designs', 'volume_m3 > 0 AND floor_area_m2 > 0')).toBe(27)
  const hours = await rows<{ to: string }>(
    db.database,
    `SELECT h.to_local AS to FROM hours h JOIN air_handlers a ON a.id = h.air_handler_id WHERE a.code = 'AH-2'`,
  )
  expect(hours).toEqual([{ to: '19:00' }]) // the documents still say so
})

it('keeps secrets out of the database, and takes a new key when the data folder is new', async () => {
  const file = path.join(dataDir, 'demo-secret')
  expect(fs.statSync(file).mode & 0o777).toBe(0o600)
  const hashOf = () => one<string>(`SELECT secret_sha256 AS v FROM sensors WHERE device_id = 'sm-202'`)
  const secret = sensorSecret(demoKey(dataDir), 'sm-202')
  expect(secret).toMatch(/^[0-9a-f]{32}$/)
  expect(isDeviceSecret(Buffer.from(secret), await hashOf())).toBe(true)

  const other = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-demo-'))
  await seedDemo({
    database: db.database,
    dataDir: other,
    now: new Date('2026-12-03T14:06:00Z'),
    historyS: HISTORY_S,
  })
  expect(isDeviceSecret(Buffer.from(secret), await hashOf())).toBe(false)
  expect(isDeviceSecret(Buffer.from(sensorSecret(demoKey(other), 'sm-202')), await hashOf())).toBe(true)
  fs.rmSync(other, { recursive: true, force: true })
})

it('writes down the truth it used', () => {
  const truth = JSON.parse(fs.readFileSync(path.join(dataDir, 'demo-truth.json'), 'utf8'))
  expect(truth.rooms).toHaveLength(27)
  expect(truth.sensors).toHaveLength(30)
  expect(truth.stories.map((s: { kind: string }) => s.kind)).toContain('halfSupply')
})

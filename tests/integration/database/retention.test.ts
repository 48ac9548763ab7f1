import fs from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { gunzipSync } from 'node:zlib'
import { sql } from 'drizzle-orm'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { readRoomSeries } from '@/db/queries/readings'
import { longestKept, rollupsKept } from '@/ingest/nightly/retention/policy'
import { type RetainOptions, retain } from '@/ingest/nightly/retention/retain'
import { rollUp } from '@/ingest/nightly/roll-up'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { type MeasuredBuilding, makeMeasuredBuilding } from '@/tests/support/measured-building'

// the database's own guard asks the real clock, so this record is laid out backwards from now
const DAY_MS = 86_400_000
const now = new Date()
const daysAgo = (days: number) => new Date(now.getTime() - days * DAY_MS)
const clock = { now: () => now }

let test: TestDatabase
let short: MeasuredBuilding
let long: MeasuredBuilding
const archiveDir = path.join(fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-archive-')), 'archive')

beforeAll(async () => {
  test = await createTestDatabase()
  short = await makeMeasuredBuilding(test.database, { slug: 'short', timeZone: 'Europe/Lisbon' })
  long = await makeMeasuredBuilding(test.database, { slug: 'long', timeZone: 'Europe/Lisbon' })
  await test.database.asSystem('test', async (tx) => {
    await tx.execute(
      sql`SELECT ensure_readings_month(m) FROM generate_series(${daysAgo(400)}::timestamptz, ${now}::timestamptz, interval '10 days') m`,
    )
    await tx.execute(sql`INSERT INTO readings (at, received_at, sensor_id, co2_ppm) SELECT m, m, s.id, 400 + s.id
      FROM generate_series(date_bin('1 hour', ${daysAgo(390)}::timestamptz, 'epoch'), ${now}::timestamptz, interval '1 hour') m, sensors s`)
    await tx.execute(
      sql`INSERT INTO latest_readings (sensor_id, at, received_at, co2_ppm) SELECT id, now(), now(), 400 FROM sensors`,
    )
  })
})
afterAll(async () => {
  await test.drop()
  fs.rmSync(path.dirname(archiveDir), { recursive: true, force: true })
})

type Rows = Record<string, unknown>[]
const ask = (query: ReturnType<typeof sql>) =>
  test.database.asSystem('test', async (tx) => (await tx.execute(query)).rows as Rows)
const run = (options: Partial<RetainOptions> = {}) =>
  retain({
    ...{
      database: test.database,
      clock,
      archiveDir,
      defaults: { readingsKeptDays: null, rollupsKeptDays: null },
    },
    ...options,
  })
const oldest = async (building: MeasuredBuilding, table: 'readings' | 'rollups') => {
  const from =
    table === 'readings'
      ? sql`SELECT min(r.at) AS at FROM readings r JOIN sensors s ON s.id = r.sensor_id WHERE s.building_id = ${building.buildingId}`
      : sql`SELECT min(r.start) AS at FROM reading_rollups r JOIN sensors s ON s.id = r.sensor_id WHERE s.building_id = ${building.buildingId}`
  return new Date((await ask(from))[0]!.at as string).getTime()
}
const keeps = (building: MeasuredBuilding, readings: number | null, rollups: number | null) =>
  ask(
    sql`UPDATE organizations SET readings_kept_days = ${readings}, rollups_kept_days = ${rollups} WHERE id = ${building.organizationId}`,
  )
const dump = () =>
  ask(
    sql`SELECT (SELECT count(*)::int FROM readings) AS readings, (SELECT count(*)::int FROM reading_rollups) AS rollups`,
  )

it('keeps everything by default, and what is not rolled up in any case', async () => {
  const before = await dump()
  expect(await run()).toEqual({ readings: 0, rollups: 0, months: [] })
  await keeps(short, 60, 90)
  expect((await run()).readings).toBe(0)
  expect(await dump()).toEqual(before)
  await rollUp({ database: test.database, clock, readingsKeptDays: null })
})

it('the application cannot delete what its organisation keeps, and nobody with a scope deletes at all', async () => {
  const deleting = (days: number, organizationId = short.organizationId) =>
    ask(sql`SELECT delete_old_readings(${organizationId}, ${daysAgo(days)}, 10)`)
  for (const refused of [deleting(59), deleting(300, long.organizationId)])
    await expect(refused).rejects.toMatchObject({ cause: { code: '42501' } })
  await expect(ask(sql`SELECT detach_readings_month('sensors')`)).rejects.toMatchObject({
    cause: { code: '42501' },
  })
  await expect(ask(sql`SELECT drop_detached_month('sensors')`)).rejects.toMatchObject({
    cause: { code: '42501' },
  })
  const thisMonth = `readings_${now.toISOString().slice(0, 7).replace('-', '_')}`
  await expect(ask(sql`SELECT detach_readings_month(${thisMonth})`)).rejects.toMatchObject({
    cause: { code: '42501' },
  })
  await expect(
    test.database.withScope({ organizationId: short.organizationId, buildingIds: null } as never, (tx) =>
      tx.execute(sql`SELECT delete_old_readings(${short.organizationId}, ${daysAgo(300)}, 10)`),
    ),
  ).rejects.toThrow()
  await expect(keeps(short, 10, null)).rejects.toMatchObject({ cause: { code: '23514' } })
})

it('deletes one organisation’s readings past its period in batches, roll-ups later, each batch with its audit line', async () => {
  const longBefore = await oldest(long, 'readings')
  const first = await run({ batchRows: 500, mostBatches: 2 })
  expect(first).toEqual({ readings: 1000, rollups: 1000, months: [] })
  const rest = await run({ batchRows: 20_000 })
  expect(rest.readings).toBeGreaterThan(3 * 24 * 325 - 1000)
  expect(await run()).toEqual({ readings: 0, rollups: 0, months: [] })
  expect(await oldest(short, 'readings')).toBeGreaterThanOrEqual(daysAgo(60).getTime())
  expect(await oldest(short, 'readings')).toBeLessThan(daysAgo(59).getTime())
  expect(await oldest(short, 'rollups')).toBeGreaterThanOrEqual(daysAgo(90).getTime())
  expect(await oldest(short, 'rollups')).toBeLessThan(daysAgo(89).getTime())
  expect(await oldest(long, 'readings')).toBe(longBefore)
  const audit = await ask(
    sql`SELECT organization_id AS o, action, sum((detail->>'rows')::int)::int AS rows FROM audit_events GROUP BY 1, 2 ORDER BY 2`,
  )
  expect(audit).toEqual([
    { o: short.organizationId, action: 'readings.deleted', rows: 1000 + rest.readings },
    { o: short.organizationId, action: 'rollups.deleted', rows: 1000 + rest.rollups },
  ])
})

it('draws a span whose readings are partly deleted from the roll-ups that are left', async () => {
  const [fromS, toS] = [daysAgo(62).getTime() / 1000, daysAgo(58).getTime() / 1000]
  const { id: roomId } = short.rooms[0]!
  const series = await test.database.asSystem('test', (tx) =>
    // so many points that each stretch is shorter than the finest roll-up
    readRoomSeries(tx, { roomId, buildingId: short.buildingId, fromS, toS, points: 8000 }),
  )
  expect(series.points).toHaveLength(4 * 24)
})

it('drops months past the longest period of all, each first as a compressed file that holds every row', async () => {
  await keeps(long, 200, null)
  const before =
    await ask(sql`SELECT b.slug AS building, s.device_id AS sensor, to_char(r.at AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.MS"Z"') AS at,
      r.co2_ppm::float8 AS co2 FROM readings r JOIN sensors s ON s.id = r.sensor_id JOIN buildings b ON b.id = s.building_id
    WHERE r.at < date_trunc('month', ${daysAgo(200)}::timestamptz, 'UTC') ORDER BY r.sensor_id, r.at`)
  // a run that ended between detaching and archiving has left this one
  const [firstMonth] = await ask(sql`SELECT partition FROM readings_months() WHERE attached LIMIT 1`)
  await ask(sql`SELECT detach_readings_month(${firstMonth!.partition})`)
  const done = await run({ batchRows: 1, mostBatches: 0 })
  expect(done.months.length).toBeGreaterThanOrEqual(6)
  const files = fs.readdirSync(archiveDir).sort()
  expect(files).toEqual(done.months.map((month) => `readings-${month}.csv.gz`))
  const lines = files.flatMap((file) =>
    gunzipSync(fs.readFileSync(path.join(archiveDir, file)))
      .toString()
      .trim()
      .split('\n')
      .slice(1),
  )
  const kept = lines.map((line) => {
    const [building, sensor, at, , co2] = line.split(',')
    return `${building} ${sensor} ${at} ${Number(co2)}`
  })
  expect(kept.sort()).toEqual(
    before.map((row) => `${row.building} ${row.sensor} ${row.at} ${row.co2}`).sort(),
  )
  expect(kept.length).toBeGreaterThan(3 * 24 * 150)
  expect(await ask(sql`SELECT FROM readings_months() WHERE NOT attached`)).toEqual([])
  expect(await oldest(long, 'readings')).toBeGreaterThanOrEqual(daysAgo(232).getTime())
  // its roll-ups reach back to the beginning
  expect(await oldest(long, 'rollups')).toBeLessThan(daysAgo(389).getTime())
  const told = await ask(
    sql`SELECT sum((detail->>'rows')::int)::int AS rows FROM audit_events WHERE action = 'readings.month-dropped' AND organization_id = ${long.organizationId}`,
  )
  expect(told).toEqual([{ rows: before.length }])
})

it('gives a month that stragglers made anew a second file', async () => {
  const [month] = fs.readdirSync(archiveDir).sort()
  const at = new Date(`${month!.slice(9, 16)}-20T12:00:00Z`)
  await ask(sql`SELECT ensure_readings_month(${at})`)
  await ask(
    sql`INSERT INTO readings (at, sensor_id, co2_ppm) VALUES (${at}, ${long.rooms[0]!.sensorId}, 555)`,
  )
  await run({ batchRows: 1, mostBatches: 0 })
  const second = path.join(archiveDir, month!.replace('.csv.gz', '-2.csv.gz'))
  expect(gunzipSync(fs.readFileSync(second)).toString().trim().split('\n')).toHaveLength(2)
})

it('an archive that cannot be written leaves the month where it is', async () => {
  const at = new Date(daysAgo(380))
  await ask(sql`SELECT ensure_readings_month(${at})`)
  await ask(
    sql`INSERT INTO readings (at, sensor_id, co2_ppm) VALUES (${at}, ${long.rooms[0]!.sensorId}, 556)`,
  )
  const blocked = path.join(path.dirname(archiveDir), 'a-file')
  fs.writeFileSync(blocked, '')
  await expect(run({ archiveDir: blocked, mostBatches: 0 })).rejects.toThrow()
  expect(await ask(sql`SELECT FROM readings_months() WHERE NOT attached`)).toHaveLength(1)
})

it('the longest period counts, for ever where one says so; roll-ups stay at least as long as readings', () => {
  const own = (readingsKeptDays: number | null, rollupsKeptDays: number | null = null) => ({
    ...{ readingsKeptDays, rollupsKeptDays },
  })
  const none = { readingsKeptDays: null, rollupsKeptDays: null }
  expect(longestKept([own(60), own(200)], none)).toBe(200)
  expect(longestKept([own(60), own(null)], none)).toBeNull()
  expect(longestKept([own(60), own(null)], { ...none, readingsKeptDays: 365 })).toBe(365)
  expect(longestKept([], { ...none, readingsKeptDays: 365 })).toBeNull()
  expect(rollupsKept(own(60), none)).toBeNull()
  expect(rollupsKept(own(60, 400), none)).toBe(400)
  expect(rollupsKept(own(500), { readingsKeptDays: null, rollupsKeptDays: 400 })).toBe(500)
  expect(rollupsKept(own(null), { readingsKeptDays: null, rollupsKeptDays: 400 })).toBeNull()
})

import { sql } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { clearLateHours } from '@/db/changes/nights'
import { type ReadingRow, storeReadings } from '@/db/changes/readings'
import { listReadingMeans, readRoomSeries } from '@/db/queries/readings'
import { rollUp } from '@/ingest/nightly/roll-up'
import { scopeOf } from '@/lib/policy/scope'
import { localDate } from '@/lib/time'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import {
  type MeasuredBuilding,
  makeMeasuredBuilding,
  type Sample,
  storeSamples,
} from '@/tests/support/measured-building'

/** Every roll-up is compared with one made here from the plain readings, another way than the database makes it. */
type Made = {
  sensorId: number
  resolutionS: number
  startS: number
  low: number
  mean: number
  high: number
  n: number
}

const HOUR = 3600
const epoch = (iso: string) => Date.parse(iso) / 1000

let test: TestDatabase
const buildings = new Map<string, MeasuredBuilding>()
beforeAll(async () => {
  test = await createTestDatabase()
  for (const timeZone of ['Europe/Berlin', 'Asia/Kathmandu'])
    buildings.set(
      timeZone,
      await makeMeasuredBuilding(test.database, { slug: timeZone.replace('/', '-').toLowerCase(), timeZone }),
    )
})
afterAll(() => test.drop())

/** A reading a minute with gaps, a value that follows from sensor and instant alone. */
function samplesOf(building: MeasuredBuilding, fromS: number, toS: number): Sample[] {
  return building.rooms.flatMap(({ sensorId }) => {
    const samples: Sample[] = []
    for (let t = fromS; t < toS; t += 60) {
      const k = Math.floor(t / 60) * 7919 + sensorId * 104_729
      if (k % 11 !== 0) samples.push({ sensorId, atS: t, co2Ppm: 400 + ((k * k) % 1601) })
    }
    return samples
  })
}

const midnights = new Map<string, number>()
const startOf = (s: number, resolutionS: number, timeZone: string): number => {
  if (resolutionS !== 86_400) return Math.floor(s / resolutionS) * resolutionS
  const quarter = Math.floor(s / 900) * 900
  const key = `${timeZone} ${quarter}`
  let at = midnights.get(key)
  if (at !== undefined) return at
  // midnight lies on a whole quarter of an hour before: walk back until the date changes
  at = quarter
  while (localDate(at - 900, timeZone) === localDate(s, timeZone)) at -= 900
  midnights.set(key, at)
  return at
}

function expected(samples: readonly Sample[], timeZone: string, rolledToS: number): Made[] {
  const made = new Map<string, Made & { sum: number }>()
  for (const resolutionS of [300, 900, HOUR, 86_400]) {
    const openS = startOf(rolledToS, resolutionS, timeZone)
    for (const { sensorId, atS, co2Ppm } of samples) {
      const startS = startOf(atS, resolutionS, timeZone)
      if (startS >= openS) continue
      const key = `${sensorId} ${resolutionS} ${startS}`
      const before = made.get(key) ?? {
        sensorId,
        resolutionS,
        startS,
        low: 1e9,
        mean: 0,
        high: 0,
        n: 0,
        sum: 0,
      }
      const sum = before.sum + co2Ppm
      const n = before.n + 1
      const [low, high] = [Math.min(before.low, co2Ppm), Math.max(before.high, co2Ppm)]
      made.set(key, { ...before, low, high, n, sum, mean: Math.round((100 * sum) / n) / 100 })
    }
  }
  return sorted([...made.values()].map(({ sum: _, ...row }) => row))
}

const sorted = (rows: Made[]) =>
  rows.sort((a, b) => a.sensorId - b.sensorId || a.resolutionS - b.resolutionS || a.startS - b.startS)

/** What the database holds, with xmin: the transaction that wrote the row. */
async function stored(building: MeasuredBuilding): Promise<{ rows: Made[]; writers: string[] }> {
  return test.database.asSystem('test', async (tx) => {
    const { rows } = await tx.execute<Made & { writer: string }>(sql`
      SELECT sensor_id AS "sensorId", resolution_s AS "resolutionS", extract(epoch from start)::float8 AS "startS", lowest_ppm::float8 AS low,
        round(mean_ppm::numeric, 2)::float8 AS mean, highest_ppm::float8 AS high, count AS n, u.xmin::text AS writer
      FROM reading_rollups u JOIN sensors s ON s.id = sensor_id WHERE s.building_id = ${building.buildingId}`)
    return {
      rows: sorted(rows.map(({ writer: _, ...row }) => row)),
      writers: rows.map((row) => row.writer),
    }
  })
}

const roll = (iso: string, readingsKeptDays: number | null = null) =>
  rollUp({ database: test.database, clock: { now: () => new Date(iso) }, readingsKeptDays })

/** Takes readings as ingest does, at an instant of arrival. */
const take = (building: MeasuredBuilding, samples: readonly Sample[], receivedMs: number) =>
  test.database.asSystemRaw('test', (client) =>
    storeReadings(
      client,
      samples.map(
        ({ sensorId, atS, co2Ppm }): ReadingRow => ({
          ...{ sensorId, buildingId: building.buildingId, atMs: atS * 1000, receivedMs, co2Ppm },
          ...{ tempC: null, rhPct: null, batteryPct: null, rssiDbm: null, marked: false },
        }),
      ),
    ),
  )

/** As text, a line each: thousands of rows are compared at once. */
const means = (rows: Made[]) =>
  rows.map((row) => Object.values({ ...row, mean: Math.round(row.mean * 10) / 10 }).join(' ')).join('\n')

describe.each(['Europe/Berlin', 'Asia/Kathmandu'])('a record of weeks in %s', (timeZone) => {
  // Berlin: the 25-hour day of 25 October lies inside; Kathmandu is 5 h 45 min ahead of UTC
  const fromS = epoch('2026-10-10T07:13:00Z')
  const historyToS = epoch('2026-11-20T09:32:00Z')
  const historyAt = '2026-11-20T09:32:10Z'
  const building = () => buildings.get(timeZone)!
  let all: Sample[] = []

  it('is rolled up whole from its history, in every resolution, whole stretches alone', async () => {
    all = samplesOf(building(), fromS, historyToS)
    for (const { sensorId } of building().rooms)
      await storeSamples(
        test.database,
        all.filter((sample) => sample.sensorId === sensorId),
      )
    // two runners at once: each step is done by one of them, once
    await Promise.all([roll(historyAt), roll(historyAt)])
    const want = expected(all, timeZone, epoch('2026-11-20T09:30:00Z'))
    expect(means((await stored(building())).rows)).toBe(means(want))
    const days = want.filter((row) => row.resolutionS === 86_400)
    expect(days.length).toBeGreaterThanOrEqual(3 * 40)
    if (timeZone === 'Europe/Berlin')
      expect(Math.max(...days.map((row) => row.n))).toBeGreaterThan(1400 * (10 / 11))
  })

  it('is not written again when the job runs again', async () => {
    const before = await stored(building())
    expect(await roll(historyAt)).toBe(0)
    expect((await stored(building())).writers).toEqual(before.writers)
  })

  it('goes on with new readings, also those that come up to half an hour after their instant', async () => {
    const fresh = samplesOf(building(), historyToS, epoch('2026-11-20T10:30:00Z'))
    const held = fresh.filter(({ atS }) => atS % 420 === 0)
    await take(
      building(),
      fresh.filter((sample) => !held.includes(sample)),
      epoch('2026-11-20T10:30:00Z') * 1000,
    )
    await roll('2026-11-20T10:31:00Z')
    // within 30 min of their instants: not late, so nothing marks them
    const nearby = held.filter(({ atS }) => atS >= epoch('2026-11-20T10:05:00Z'))
    await take(building(), nearby, epoch('2026-11-20T10:34:00Z') * 1000)
    await roll('2026-11-20T10:36:00Z')
    all = [...all, ...fresh.filter((sample) => !held.includes(sample)), ...nearby]
    expect(means((await stored(building())).rows)).toBe(
      means(expected(all, timeZone, epoch('2026-11-20T10:35:00Z'))),
    )
  })

  it('is made again where readings came late, over the end of a day and of a month', async () => {
    const late = building().rooms.flatMap(({ sensorId }): Sample[] =>
      ['2026-10-24T22:00:30Z', '2026-10-31T23:59:30Z', '2026-11-01T00:00:30Z'].map((iso) => ({
        ...{ sensorId, atS: epoch(iso), co2Ppm: 4321 },
      })),
    )
    await take(building(), late, epoch('2026-11-20T10:40:00Z') * 1000)
    await test.database.asSystem('test', (tx) =>
      clearLateHours(tx, { buildingId: building().buildingId, until: new Date('2026-11-20T10:41:00Z') }),
    )
    all = [...all, ...late]
    await roll('2026-11-20T10:41:00Z')
    expect(means((await stored(building())).rows)).toBe(
      means(expected(all, timeZone, epoch('2026-11-20T10:40:00Z'))),
    )
    expect(await roll('2026-11-20T10:41:00Z')).toBe(0)
  })

  it('keeps a whole hour’s roll-up where its readings are deleted by policy and a straggler comes', async () => {
    const before = await stored(building())
    const straggler = {
      sensorId: building().rooms[0]!.sensorId,
      atS: epoch('2026-10-12T03:00:07Z'),
      co2Ppm: 4999,
    }
    await take(building(), [straggler], epoch('2026-11-20T10:41:30Z') * 1000)
    await test.database.asSystem('test', (tx) =>
      clearLateHours(tx, { buildingId: building().buildingId, until: new Date('2026-11-20T10:42:00Z') }),
    )
    await roll('2026-11-20T10:42:00Z', 30)
    expect((await stored(building())).writers).toEqual(before.writers)
    all = [...all, straggler]
  })
})

describe('a chart and means', () => {
  const room = () => buildings.get('Europe/Berlin')!.rooms[0]!
  const inside = (fromS: number, toS: number) =>
    test.database
      .asSystem('test', (tx) =>
        tx.execute<{
          t: number
          c: number
        }>(sql`SELECT extract(epoch from at)::float8 AS t, co2_ppm::float8 AS c FROM readings
          WHERE sensor_id = ${room().sensorId} AND at >= to_timestamp(${fromS}) AND at < to_timestamp(${toS}) ORDER BY at`),
      )
      .then(({ rows }) => rows)
  const place = () => ({ roomId: room().id, buildingId: buildings.get('Europe/Berlin')!.buildingId })

  it.each([
    ['five weeks in 400 points, from hours', '2026-10-14T00:07:00Z', '2026-11-20T10:38:30Z', 400],
    ['six days in 400 points, from quarters', '2026-11-14T11:07:00Z', '2026-11-20T10:38:30Z', 400],
    ['four days in 4000 points, from readings', '2026-11-16T11:07:00Z', '2026-11-20T10:38:30Z', 4000],
  ])(
    '%s: no more points, the extremes of all readings kept in their stretch',
    async (_, from, to, points) => {
      const [fromS, toS] = [epoch(from), epoch(to)]
      const series = await test.database.asSystem('test', (tx) =>
        readRoomSeries(tx, { ...place(), fromS, toS, points }),
      )
      const plain = await inside(fromS, toS)
      expect(series.points.length).toBeLessThanOrEqual(points)
      expect(series.points.length).toBeGreaterThan(points / 2)
      const stretchS = (toS - fromS) / Math.floor(points / 2)
      const highest = plain.reduce((best, each) => (each.c > best.c ? each : best))
      const lowest = plain.reduce((best, each) => (each.c < best.c ? each : best))
      for (const extreme of [highest, lowest]) {
        const near = series.points.filter(([t]) => Math.abs(t - extreme.t) <= stretchS).map(([, c]) => c)
        expect(near).toContain(extreme.c)
      }
      expect(Math.max(...series.points.map(([, c]) => c))).toBe(highest.c)
      expect(Math.min(...series.points.map(([, c]) => c))).toBe(lowest.c)
    },
  )

  it.each([
    [300, '2026-11-19T05:02:30Z'],
    [900, '2026-11-19T05:02:30Z'],
    [3600, '2026-11-10T05:02:30Z'],
    [86_400, '2026-10-20T05:02:30Z'],
  ] as const)(
    'means of %d s equal those of the readings, also in cut stretches at both ends',
    async (resolutionS, from) => {
      const [fromS, toS] = [epoch(from), epoch('2026-11-20T10:38:30Z')]
      const rows = await test.database.asSystem('test', (tx) =>
        listReadingMeans(tx, { ...place(), fromS, toS, resolutionS, timeZone: 'Europe/Berlin' }),
      )
      const groups = new Map<number, number[]>()
      for (const { t, c } of await inside(fromS, toS)) {
        const start = startOf(t, resolutionS, 'Europe/Berlin')
        groups.set(start, [...(groups.get(start) ?? []), c])
      }
      expect(groups.size).toBeGreaterThan(20)
      const round = (value: number) => Math.round(value * 100) / 100
      expect(rows.map((row) => ({ ...row, meanPpm: round(row.meanPpm) }))).toEqual(
        [...groups].map(([atS, values]) => ({
          atS,
          meanPpm: round(values.reduce((a, b) => a + b, 0) / values.length),
          lowestPpm: Math.min(...values),
          highestPpm: Math.max(...values),
          readings: values.length,
        })),
      )
    },
  )

  it('corrects by the fresh-air check that holds at the time', async () => {
    const { organizationId } = buildings.get('Europe/Berlin')!
    const span = {
      ...place(),
      fromS: epoch('2026-10-11T00:00:00Z'),
      toS: epoch('2026-11-20T00:00:00Z'),
      points: 400,
    }
    const read = () => test.database.asSystem('test', (tx) => readRoomSeries(tx, span))
    const before = await read()
    await test.database.asSystem('test', (tx) =>
      tx.execute(sql`INSERT INTO sensor_offsets (organization_id, sensor_id, from_at, offset_ppm, standard_uncertainty_ppm, origin)
        VALUES (${organizationId}, ${room().sensorId}, '2026-11-01T00:00:00Z', -50, 10, 'test')`),
    )
    const after = await read()
    expect(after.points.length).toBeGreaterThan(200)
    const changes = after.points.map(([t, c], i) => [t, c - before.points[i]![1]])
    const changedS = epoch('2026-11-01T00:00:00Z')
    const stretchS = (span.toS - span.fromS) / 200
    expect(changes.filter(([t, d]) => t! < changedS - stretchS && d !== 0)).toEqual([])
    expect(changes.filter(([t, d]) => t! > changedS + stretchS && d !== -50)).toEqual([])
  })

  it('shows a tenant only stretches that lie wholly in its period, and another organisation none', async () => {
    const { organizationId, buildingId } = buildings.get('Europe/Berlin')!
    const tenancyId = await test.database.asSystem('test', async (tx) => {
      const { rows } = await tx.execute<{
        id: number
      }>(sql`INSERT INTO tenancies (organization_id, building_id, public_id, name, digest_emails)
        VALUES (${organizationId}, ${buildingId}, 'late-tenant', 'Late tenant', '{}') RETURNING id`)
      await tx.execute(sql`INSERT INTO room_tenancies (organization_id, tenancy_id, room_id, from_at, to_at)
        VALUES (${organizationId}, ${rows[0]!.id}, ${room().id}, '2026-11-05T10:20:00Z', '2026-11-08T10:20:00Z')`)
      return rows[0]!.id
    })
    const seen = (organization: number, tenancy: number | null) =>
      test.database.withScope(
        scopeOf({
          ...{ userId: 1, organizationId: organization, roles: tenancy ? ['tenant'] : ['operator'] },
          ...{ buildingIds: null, tenancyId: tenancy },
        }),
        async (tx) =>
          (
            await tx.execute<{ r: number; first: string; last: string }>(sql`
            SELECT resolution_s AS r, to_char(min(start) AT TIME ZONE 'UTC', 'DD HH24:MI') AS first, to_char(max(start) AT TIME ZONE 'UTC', 'DD HH24:MI') AS last
            FROM visible_rollups WHERE room_id = ${room().id} GROUP BY 1 ORDER BY 1`)
          ).rows,
      )
    expect(await seen(organizationId, tenancyId)).toEqual([
      { r: 300, first: '05 10:20', last: '08 10:15' },
      { r: 900, first: '05 10:30', last: '08 10:00' },
      { r: 3600, first: '05 11:00', last: '08 09:00' },
      { r: 86_400, first: '05 23:00', last: '06 23:00' },
    ])
    expect(await seen(organizationId, null)).toHaveLength(4)
    expect(await seen(buildings.get('Asia/Kathmandu')!.organizationId, null)).toEqual([])
  })
})

import { afterAll, beforeAll, expect, test } from 'vitest'
import { readRoomSeries } from '@/db/queries/readings'
import { scopeOf } from '@/lib/policy/scope'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { HANDED_OVER, makeSmallOrganization, type SmallOrganization } from '@/tests/support/small-building'

let db: TestDatabase
let mill: SmallOrganization
const FROM = Date.UTC(2026, 4, 8) / 1000
const DAY = 86_400
const TO = FROM + 6 * DAY
const PEAK = FROM + 1234 * 60
const DIP = FROM + 5001 * 60

beforeAll(async () => {
  db = await createTestDatabase()
  mill = await makeSmallOrganization(db.database, 'mill')
  await db.database.asSystemRaw('test: six days of minutes with one peak and one dip', async (client) => {
    for (const { sensorId } of [mill.rooms.hall, mill.rooms.studio]) {
      await client.query(
        `INSERT INTO readings (sensor_id, at, co2_ppm)
         SELECT $1, to_timestamp(t), CASE t WHEN $4 THEN 1900 WHEN $5 THEN 401 ELSE 600 + 20 * sin(t / 3000.0) END
         FROM generate_series($2::bigint, $3::bigint - 1, 60) AS t ON CONFLICT DO NOTHING`,
        [sensorId, FROM, TO, PEAK, DIP],
      )
    }
  })
})
afterAll(() => db?.drop())

const member = () => ({ userId: 0, organizationId: mill.organizationId, buildingIds: null })
const operator = () => scopeOf({ ...member(), roles: ['operator'], tenancyId: null })

const seriesOf = (room: 'hall' | 'studio', points: number, scope = operator(), fromS = FROM, toS = TO) =>
  db.database.withScope(scope, (tx) =>
    readRoomSeries(tx, { roomId: mill.rooms[room].id, buildingId: mill.buildingId, fromS, toS, points }),
  )

test.each([100, 400, 1200])(
  'a line of at most %i points keeps the peak and the dip, in the order of time',
  async (most) => {
    const { points } = await seriesOf('hall', most)
    expect(points.length).toBeLessThanOrEqual(most)
    expect(points.length).toBeGreaterThan(most / 3)
    const values = points.map(([, ppm]) => Math.round(ppm))
    expect(Math.max(...values)).toBe(1900)
    expect(Math.min(...values)).toBe(401)
    const times = points.map(([at]) => at)
    expect(times).toEqual([...times].sort((a, b) => a - b))
  },
)

test('a span with fewer readings than points gives each reading once', async () => {
  const { points } = await seriesOf('hall', 400, operator(), FROM, FROM + 3600)
  expect(points).toHaveLength(60)
  expect(new Set(points.map(([at]) => at)).size).toBe(60)
})

test('the offset of a fresh-air check counts from its day on; the raw reading stays', async () => {
  const half = FROM + 3 * DAY
  await db.database.asSystemRaw('test: offset', (client) =>
    client.query(
      `INSERT INTO sensor_offsets (organization_id, sensor_id, from_at, offset_ppm, standard_uncertainty_ppm, origin)
       VALUES ($1, $2, to_timestamp($3), -50, 10, 'test')`,
      [mill.organizationId, mill.rooms.studio.sensorId, half],
    ),
  )
  const raw = (at: number) => 600 + 20 * Math.sin(at / 3000)
  for (const [from, offset] of [
    [FROM + DAY, 0],
    [half + DAY, -50],
  ] as const) {
    const { points } = await seriesOf('studio', 400, operator(), from, from + 3600)
    expect(points).toHaveLength(60)
    for (const [at, ppm] of points) expect(ppm).toBeCloseTo(raw(at) + offset, 2)
  }
})

test('a tenant’s line begins and ends with the tenancy', async () => {
  const tenant = (tenancyId: number) => scopeOf({ ...member(), roles: ['tenant'], tenancyId })
  const handedOver = HANDED_OVER.getTime() / 1000
  const former = await seriesOf('studio', 400, tenant(mill.tenancies.loom.id))
  const present = await seriesOf('studio', 400, tenant(mill.tenancies.weir.id))
  expect(Math.max(...former.points.map(([at]) => at))).toBeLessThan(handedOver)
  expect(Math.min(...present.points.map(([at]) => at))).toBeGreaterThanOrEqual(handedOver)
  expect((await seriesOf('hall', 400, tenant(mill.tenancies.loom.id))).points).toEqual([])
})

import { and, eq } from 'drizzle-orm'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { putPerson } from '@/db/changes/people'
import * as schema from '@/db/schema'
import { analyseHistory } from '@/ingest/nightly/analysis/history'
import { judgeWeeks } from '@/ingest/nightly/judge/judge'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import {
  dates,
  type MeasuredBuilding,
  makeMeasuredBuilding,
  type Sample,
  samplesOf,
  storeSamples,
} from '@/tests/support/measured-building'

const clock = { now: () => new Date('2026-03-20T13:00:00Z') }
const WEEK = '2026-03-02'
const NIGHT = '2026-03-04'

let test: TestDatabase
let building: MeasuredBuilding
let userId: number
let samples: Sample[]

beforeAll(async () => {
  test = await createTestDatabase()
  building = await makeMeasuredBuilding(test.database, { slug: 'reviews', timeZone: 'Europe/Berlin' })
  samples = samplesOf(building, dates(WEEK, '2026-03-06'))
  const inHole = ({ atS }: Sample) =>
    atS >= Date.parse(`${NIGHT}T16:50:00Z`) / 1000 && atS < Date.parse(`${NIGHT}T16:58:00Z`) / 1000
  await storeSamples(
    test.database,
    samples.filter((sample) => !inHole(sample)),
  )
  const { organizationId } = building
  await test.database.asSystem('test', (tx) =>
    putPerson(
      tx,
      {
        organizationId,
        email: 'engineer@reviews.example',
        name: 'Engineer',
        passwordHash: 'none',
        roles: ['engineer'],
        buildingIds: null,
        tenancyId: null,
      },
      null,
    ),
  )
  const [user] = await test.database.asSystem('test', (tx) =>
    tx.select({ id: schema.users.id }).from(schema.users),
  )
  userId = user!.id
  await analyseHistory(span())
})
afterAll(() => test.drop())

const span = () => ({
  database: test.database,
  buildingId: building.buildingId,
  fromDate: WEEK,
  toDate: '2026-03-06',
  clock,
})
const room = () => building.rooms[0]!

async function eveningDecay() {
  const rows = await test.database.asSystem('test', (tx) =>
    tx
      .select()
      .from(schema.decays)
      .where(
        and(
          eq(schema.decays.roomId, room().id),
          eq(schema.decays.night, NIGHT),
          eq(schema.decays.mode, 'supply on'),
        ),
      ),
  )
  return rows.filter((row) => row.supersededAt === null && row.quality === 'accepted').at(-1)!
}

async function week() {
  await judgeWeeks(span())
  const [row] = await test.database.asSystem('test', (tx) =>
    tx
      .select()
      .from(schema.roomWeeks)
      .where(
        and(
          eq(schema.roomWeeks.roomId, room().id),
          eq(schema.roomWeeks.weekStart, WEEK),
          eq(schema.roomWeeks.mode, 'supply on'),
        ),
      ),
  )
  return row!
}

async function review(
  values: Partial<typeof schema.decayReviews.$inferInsert> &
    Pick<typeof schema.decayReviews.$inferInsert, 'decision'>,
) {
  const decay = await eveningDecay()
  const { organizationId, buildingId, roomId, sensorId } = decay
  const [row] = await test.database.asSystem('test', (tx) =>
    tx
      .insert(schema.decayReviews)
      .values({
        organizationId,
        buildingId,
        roomId,
        sensorId,
        decayId: decay.id,
        fromAt: decay.startAt,
        toAt: decay.endAt,
        reason: 'test',
        createdBy: userId,
        ...values,
      })
      .returning({ id: schema.decayReviews.id }),
  )
  return row!.id
}

const withdraw = (id: number) =>
  test.database.asSystem('test', (tx) =>
    tx.update(schema.decayReviews).set({ withdrawnAt: clock.now() }).where(eq(schema.decayReviews.id, id)),
  )

it('counts the decays that a reviewer left in, and not the one left out', async () => {
  const all = await week()
  expect(all.days).toBe(5)
  const id = await review({ decision: 'leave out' })
  const without = await week()
  expect(without.days).toBe(4)
  expect(without.decays).toBe(all.decays - 1)
  expect(without.verdictDays).toBe(4)
  expect(without.verdictReason).toBe('too-few-days')
  await withdraw(id)
  const again = await week()
  const { id: _, computedAt: __, ...rest } = again
  const { id: ___, computedAt: ____, ...was } = all
  expect(rest).toEqual(was)
})

it('takes the figures of a window that a reviewer drew', async () => {
  const before = await week()
  const id = await review({
    decision: 'keep with window',
    airChangeRatePerHour: 6,
    airChangeRateLowPerHour: 5.8,
    airChangeRateHighPerHour: 6.2,
  })
  const after = await week()
  expect(after.days).toBe(before.days)
  expect(after.airChangeRatePerHour!).toBeGreaterThan(1.08 * before.airChangeRatePerHour!)
  await withdraw(id)
  expect((await week()).airChangeRatePerHour).toBeCloseTo(before.airChangeRatePerHour!, 9)
})

it('carries a review to the decay that late readings made, says that its data changed and fits its window again', async () => {
  const old = await eveningDecay()
  const id = await review({
    decision: 'keep with window',
    airChangeRatePerHour: 9,
    airChangeRateLowPerHour: 8,
    airChangeRateHighPerHour: 10,
  })
  await storeSamples(test.database, samples)
  await analyseHistory({ ...span(), fromDate: NIGHT, toDate: NIGHT })
  const fresh = await eveningDecay()
  expect(fresh.id).not.toBe(old.id)
  expect(fresh.points).toBeGreaterThan(old.points)
  const [row] = await test.database.asSystem('test', (tx) =>
    tx.select().from(schema.decayReviews).where(eq(schema.decayReviews.id, id)),
  )
  expect(row).toMatchObject({
    decayId: fresh.id,
    dataChanged: true,
    fromAt: old.startAt,
    toAt: old.endAt,
    reason: 'test',
    createdBy: userId,
  })
  // 9 per hour was no fit of these readings: the room's true rate is 3
  expect(Math.abs(row!.airChangeRatePerHour! - room().rateOnPerHour)).toBeLessThan(0.3)
  const audits = await test.database.asSystem('test', (tx) =>
    tx.select().from(schema.auditEvents).where(eq(schema.auditEvents.action, 'decay.refitted')),
  )
  expect(audits.map((event) => event.detail)).toMatchObject([
    { from: { rate: 9 }, to: { rate: row!.airChangeRatePerHour } },
  ])
  expect((await week()).days).toBe(5)
})

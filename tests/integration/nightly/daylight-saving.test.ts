import { and, eq, isNull } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import * as schema from '@/db/schema'
import { analyseHistory } from '@/ingest/nightly/analysis/history'
import { nightWindow } from '@/ingest/nightly/analysis/window'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { dates, makeMeasuredBuilding, samplesOf, storeSamples } from '@/tests/support/measured-building'

const TIME_ZONE = 'Europe/Berlin'
const HOUR_S = 3600

/** People until half past one, the supply all day long: the decays lie across the change of the clocks at 02:00 and 03:00. */
const lateRooms = [
  {
    number: '0.01',
    name: 'Late hall',
    volumeM3: 150,
    rateOnPerHour: 0.9,
    rateOffPerHour: 0.9,
    designHeadcount: 10,
    dayPlan: { peopleFrom: '20:00', peopleTo: '01:30', persons: 20, nextDay: true },
  },
  {
    number: '0.02',
    name: 'Late room',
    volumeM3: 80,
    rateOnPerHour: 1.5,
    rateOffPerHour: 1.5,
    designHeadcount: 6,
    dayPlan: { peopleFrom: '20:00', peopleTo: '01:30', persons: 12, nextDay: true },
  },
]

let test: TestDatabase
beforeAll(async () => {
  test = await createTestDatabase()
})
afterAll(() => test.drop())

// Berlin 2026: 29 March 02:00 becomes 03:00 (23 h), 25 October 03:00 becomes 02:00 (25 h)
describe.each([
  { change: '2026-03-29', hours: 23, changesAfterH: 2, slug: 'spring' },
  { change: '2026-10-25', hours: 25, changesAfterH: 3, slug: 'autumn' },
])('the night of $change, a day of $hours hours', ({ change, hours, changesAfterH, slug }) => {
  it('is as long as it is', () => {
    const window = nightWindow(change, TIME_ZONE)
    expect((window.dayEndS - window.dayStartS) / HOUR_S).toBe(hours)
    expect(window.readFromS).toBe(window.dayStartS - 2 * HOUR_S)
    expect(window.readToS).toBe(window.dayEndS + 12 * HOUR_S)
  })

  it('measures decays across the change by elapsed time, and keeps each decay for one night only', async () => {
    const building = await makeMeasuredBuilding(test.database, {
      slug,
      timeZone: TIME_ZONE,
      rooms: lateRooms,
      supply: ['00:00', '24:00'],
    })
    const [from, to] = [
      `${change.slice(0, 8)}${Number(change.slice(8)) - 3}`,
      `${change.slice(0, 8)}${Number(change.slice(8)) + 2}`,
    ]
    await storeSamples(
      test.database,
      samplesOf(building, dates(from, to), { everyDay: true, supply: ['00:00', '24:00'] }),
    )
    await analyseHistory({
      database: test.database,
      buildingId: building.buildingId,
      fromDate: from,
      toDate: to,
      clock: { now: () => new Date('2026-12-01T00:00:00Z') },
    })
    const rows = await test.database.asSystem('test', (tx) =>
      tx
        .select()
        .from(schema.decays)
        .where(and(eq(schema.decays.buildingId, building.buildingId), isNull(schema.decays.supersededAt))),
    )
    // people leave at 01:30 of the day of the change: the decay belongs to that local date
    const window = nightWindow(change, TIME_ZONE)
    const changed = rows.filter(
      (row) =>
        row.night === change &&
        row.quality === 'accepted' &&
        row.startAt.getTime() / 1000 < window.dayStartS + 2 * HOUR_S,
    )
    expect(changed).toHaveLength(lateRooms.length)
    for (const row of changed) {
      const room = building.rooms.find((one) => one.id === row.roomId)!
      expect(row.airChangeRatePerHour! / room.rateOnPerHour, room.name).toBeGreaterThan(0.9)
      expect(row.airChangeRatePerHour! / room.rateOnPerHour, room.name).toBeLessThan(1.1)
      expect(row.startAt.getTime() / 1000).toBeLessThan(window.dayStartS + changesAfterH * HOUR_S)
      expect(row.endAt.getTime() / 1000).toBeGreaterThan(window.dayStartS + changesAfterH * HOUR_S)
    }
    // no instant is told twice: windows of neighbouring nights overlap, the decays they own do not
    for (const room of building.rooms) {
      const own = rows
        .filter((row) => row.roomId === room.id)
        .sort((a, b) => a.startAt.getTime() - b.startAt.getTime())
      own.forEach((row, i) => {
        const next = own[i + 1]
        if (next)
          expect(next.startAt.getTime(), `${room.name} ${row.night}`).toBeGreaterThanOrEqual(
            row.endAt.getTime(),
          )
      })
      expect(
        own.every((row) => row.startAt.getTime() / 1000 >= nightWindow(row.night, TIME_ZONE).dayStartS),
      ).toBe(true)
      expect(
        own.every((row) => row.startAt.getTime() / 1000 < nightWindow(row.night, TIME_ZONE).dayEndS),
      ).toBe(true)
    }
  })
})

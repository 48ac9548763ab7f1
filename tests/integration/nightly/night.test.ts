import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import * as schema from '@/db/schema'
import { analyseHistory } from '@/ingest/nightly/analysis/history'
import { judgeWeeks } from '@/ingest/nightly/judge/judge'
import { flowLitresPerSecond } from '@/lib/units'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { dumpResults } from '@/tests/support/dump'
import {
  dates,
  type MeasuredBuilding,
  makeMeasuredBuilding,
  samplesOf,
  storeSamples,
} from '@/tests/support/measured-building'

const FIRST = '2026-03-02'
const LAST = '2026-03-15'
const at = (instant: string) => ({ now: () => new Date(instant) })
const after = at('2026-03-16T18:00:00Z')

let test: TestDatabase
let building: MeasuredBuilding

beforeAll(async () => {
  test = await createTestDatabase()
  building = await makeMeasuredBuilding(test.database, { slug: 'nightly', timeZone: 'Europe/Berlin' })
  await storeSamples(test.database, samplesOf(building, dates(FIRST, LAST)))
})
afterAll(() => test.drop())

const span = () => ({
  database: test.database,
  buildingId: building.buildingId,
  fromDate: FIRST,
  toDate: LAST,
  clock: after,
})
const read = <T>(fn: Parameters<TestDatabase['database']['asSystem']>[1]) =>
  test.database.asSystem('test', fn) as Promise<T>
type Decay = typeof schema.decays.$inferSelect
const standing = async () =>
  (await read<Decay[]>((tx) => tx.select().from(schema.decays).orderBy(schema.decays.id))).filter(
    (row) => row.supersededAt === null,
  )

describe('two weeks of three rooms', () => {
  it('finds the evening decay of every working day near its true rate', async () => {
    const result = await analyseHistory(span())
    expect(result.nights).toBe(14)
    const rows = await standing()
    for (const room of building.rooms) {
      const evenings = rows.filter(
        (row) => row.roomId === room.id && row.quality === 'accepted' && row.mode === 'supply on',
      )
      expect(new Set(evenings.map((row) => row.night)).size, room.name).toBeGreaterThanOrEqual(8)
      for (const row of evenings)
        expect(
          Math.abs(row.airChangeRatePerHour! / room.rateOnPerHour - 1),
          `${room.name} ${row.night}`,
        ).toBeLessThan(0.15)
      for (const row of evenings)
        expect(
          row.lead && row.provisional === false && row.night === row.startAt.toISOString().slice(0, 10),
        ).toBe(true)
    }
    // nobody was there on Saturday and Sunday
    expect(
      rows.filter((row) => ['2026-03-07', '2026-03-08'].includes(row.night) && row.quality === 'accepted'),
    ).toEqual([])
  })

  it('judges each room by its true flow', async () => {
    await judgeWeeks(span())
    const weeks = await read<(typeof schema.roomWeeks.$inferSelect)[]>((tx) =>
      tx.select().from(schema.roomWeeks).where(eq(schema.roomWeeks.weekStart, '2026-03-09')),
    )
    for (const room of building.rooms) {
      const own = weeks.filter((week) => week.roomId === room.id)
      const judged = own.filter((week) => week.verdict !== null)
      expect(judged, room.name).toHaveLength(1)
      const [week] = judged
      const trueLps = flowLitresPerSecond(room.rateOnPerHour, room.volumeM3)
      const basisLps = 7 * room.designHeadcount + (0.7 * room.volumeM3) / 3
      expect(week!.basisFlowLps).toBeCloseTo(basisLps, 6)
      expect(week!.flowLowLps!).toBeLessThan(trueLps)
      expect(week!.flowHighLps!).toBeGreaterThan(trueLps)
      expect(week!.verdict).toBe(trueLps > basisLps ? 'meets basis' : 'short of basis')
      expect(week!.mode).toBe('supply on')
      // people by the flow's lower end, rounded down, never above the permitted 40
      const persons = Math.max(0, Math.floor((week!.flowLowLps! - (0.7 * room.volumeM3) / 3) / 7))
      expect(week!.supportsPersons).toBe(Math.min(40, persons))
    }
  })

  it('changes nothing when every night and week is run again', async () => {
    const before = await dumpResults(test.database)
    expect(before.decays!.length).toBeGreaterThan(20)
    const again = await analyseHistory({ ...span(), clock: at('2026-03-17T18:00:00Z') })
    expect(again.changed).toEqual([])
    const one = await analyseHistory({ ...span(), fromDate: '2026-03-10', toDate: '2026-03-10' })
    expect(one.changed).toEqual([])
    expect((await judgeWeeks(span())).rowsChanged).toBe(0)
    expect(await dumpResults(test.database)).toEqual(before)
  })
})

describe('a night that is not over', () => {
  it('is provisional first, and final without new rows where nothing new was read', async () => {
    const other = await makeMeasuredBuilding(test.database, { slug: 'early', timeZone: 'Europe/Berlin' })
    const morning = Date.parse('2026-03-03T03:00:00Z') / 1000
    const all = samplesOf(other, ['2026-03-02'])
    await storeSamples(
      test.database,
      all.filter((sample) => sample.atS < morning),
    )
    const night = {
      database: test.database,
      buildingId: other.buildingId,
      fromDate: '2026-03-02',
      toDate: '2026-03-02',
    }
    await analyseHistory({ ...night, clock: at('2026-03-03T03:00:00Z') })
    const early = (await standing()).filter((row) => row.buildingId === other.buildingId)
    expect(early.length).toBeGreaterThan(0)
    expect(early.every((row) => row.provisional)).toBe(true)

    await analyseHistory({ ...night, clock: at('2026-03-03T11:30:00Z') })
    const final = (await standing()).filter((row) => row.buildingId === other.buildingId)
    expect(final.map(({ provisional, ...row }) => row)).toEqual(early.map(({ provisional, ...row }) => row))
    expect(final.every((row) => !row.provisional)).toBe(true)

    // the rest of the night arrives: what it changes is superseded, not overwritten
    await storeSamples(
      test.database,
      all.filter((sample) => sample.atS >= morning),
    )
    await analyseHistory({ ...night, clock: at('2026-03-03T11:40:00Z') })
    const every = await read<Decay[]>((tx) =>
      tx.select().from(schema.decays).where(eq(schema.decays.buildingId, other.buildingId)),
    )
    const kept = every.filter((row) => early.some((one) => one.id === row.id))
    expect(kept).toHaveLength(early.length)
    const bare = ({ supersededAt, provisional, ...row }: Decay) => row
    expect(kept.map(bare)).toEqual(early.map(bare))
    const runs = await read<(typeof schema.nightRuns.$inferSelect)[]>((tx) =>
      tx.select().from(schema.nightRuns).where(eq(schema.nightRuns.buildingId, other.buildingId)),
    )
    expect(runs.map((run) => [run.state, run.provisional])).toEqual([
      ['done', false],
      ['done', false],
    ])
    expect(new Set(runs.map((run) => run.inputHash)).size).toBe(2)
  })
})

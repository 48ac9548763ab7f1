import { eq } from 'drizzle-orm'
import pino from 'pino'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { markLateHours } from '@/db/changes/late-readings'
import * as schema from '@/db/schema'
import { analyseHistory } from '@/ingest/nightly/analysis/history'
import { tick } from '@/ingest/nightly/jobs/tick'
import { startJobs } from '@/ingest/nightly/runner'
import { createMailer } from '@/lib/server/mail/mailer'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import {
  dates,
  type MeasuredBuilding,
  makeMeasuredBuilding,
  samplesOf,
  storeSamples,
} from '@/tests/support/measured-building'
import { queuedJobs, until } from '@/tests/support/queue'

const clock = { now: () => new Date('2026-03-06T13:00:00Z') }
/** 18:10 to 18:40 in Berlin on 4 March: the middle of the evening decays. */
const HOLE = {
  fromS: Date.parse('2026-03-04T16:10:00Z') / 1000,
  toS: Date.parse('2026-03-04T17:40:00Z') / 1000,
}

let test: TestDatabase
let building: MeasuredBuilding

beforeAll(async () => {
  test = await createTestDatabase()
  building = await makeMeasuredBuilding(test.database, { slug: 'late', timeZone: 'Europe/Berlin' })
})
afterAll(() => test.drop())

const decays = () =>
  test.database.asSystem('test', (tx) => tx.select().from(schema.decays).orderBy(schema.decays.id))
const runs = () =>
  test.database.asSystem('test', (tx) => tx.select().from(schema.nightRuns).orderBy(schema.nightRuns.id))
const marks = () => test.database.asSystem('test', (tx) => tx.select().from(schema.lateReadings))

async function workOffQueue(): Promise<void> {
  const mailer = createMailer({ host: '127.0.0.1', port: 9, from: 'nobody@ebbmark.example' })
  const runner = await startJobs({
    database: test.database,
    ownerUrl: test.ownerUrl,
    clock,
    log: pino({ level: 'silent' }),
    mailer,
    publicUrl: 'http://127.0.0.1:3000',
    scheduled: false,
  })
  await until('the queue is empty', async () => (await queuedJobs(test)).length === 0)
  await runner.stop()
}

it('queues missing nights, runs them, and runs a night again when readings of it come late', async () => {
  const all = samplesOf(building, dates('2026-03-02', '2026-03-05'))
  const inHole = (sample: { atS: number }) => sample.atS >= HOLE.fromS && sample.atS < HOLE.toS
  await storeSamples(
    test.database,
    all.filter((sample) => !inHole(sample)),
  )

  await tick({ database: test.database, clock })
  const queued = await queuedJobs(test)
  // the readings begin at 22:00 of 1 March, whose night is owed too
  expect(queued.find((job) => job.task === 'analyse-history')?.payload).toEqual({
    buildingId: building.buildingId,
    fromDate: '2026-03-01',
    toDate: '2026-03-05',
  })
  await tick({ database: test.database, clock })
  expect(await queuedJobs(test)).toHaveLength(queued.length)
  await workOffQueue()
  const firstRuns = await runs()
  expect(firstRuns.map((run) => [run.localDate, run.state, run.provisional])).toEqual(
    dates('2026-03-01', '2026-03-05').map((date) => [date, 'done', false]),
  )
  await tick({ database: test.database, clock })
  expect((await queuedJobs(test)).map((job) => job.task)).toEqual(['watch-sensors'])
  await workOffQueue()

  const before = await decays()
  const late = all.filter(inHole)
  await storeSamples(test.database, late)
  await test.database.asSystemRaw('test: late', (client) =>
    markLateHours(
      client,
      late.map((sample) => ({
        buildingId: building.buildingId,
        atMs: sample.atS * 1000,
        receivedMs: clock.now().getTime() - 1000,
      })),
    ),
  )
  expect(await marks()).toHaveLength(2)
  await tick({ database: test.database, clock })
  expect(
    (await queuedJobs(test)).filter((job) => job.task === 'analyse-night').map((job) => job.payload.date),
  ).toEqual(['2026-03-04'])
  expect(await marks()).toEqual([])
  await workOffQueue()

  const night = (rows: typeof before) => rows.filter((row) => row.night === '2026-03-04')
  const now = await decays()
  expect((await runs()).filter((run) => run.localDate === '2026-03-04').map((run) => run.state)).toEqual([
    'done',
    'done',
  ])
  const evening = (rows: typeof before) =>
    night(rows).filter(
      (row) => row.supersededAt === null && row.quality === 'accepted' && row.mode === 'supply on',
    )
  expect(evening(now)).toHaveLength(building.rooms.length)
  for (const row of evening(now))
    expect(evening(before).every((old) => old.points < row.points || old.roomId !== row.roomId)).toBe(true)
  // nothing that stood was overwritten, and other nights were left alone
  for (const old of before) {
    const { supersededAt, ...row } = now.find((one) => one.id === old.id)!
    const { supersededAt: _, ...was } = old
    expect(row).toEqual(was)
    if (old.night !== '2026-03-04') expect(supersededAt).toEqual(old.supersededAt)
  }
})

it('does not run a night again for readings that its run has yet to read', async () => {
  const morning = { now: () => new Date('2026-03-07T07:00:00Z') }
  const all = samplesOf(building, dates('2026-03-06', '2026-03-06'), {
    seed: 7,
    untilS: morning.now().getTime() / 1000,
  })
  await storeSamples(test.database, all)
  await analyseHistory({
    database: test.database,
    buildingId: building.buildingId,
    fromDate: '2026-03-06',
    toDate: '2026-03-06',
    clock: morning,
  })
  await test.database.asSystemRaw('test: late', (client) =>
    markLateHours(client, [
      {
        buildingId: building.buildingId,
        atMs: Date.parse('2026-03-06T20:00:00Z'),
        receivedMs: morning.now().getTime() - 1000,
      },
    ]),
  )
  await tick({ database: test.database, clock: morning })
  expect((await queuedJobs(test)).filter((job) => job.task === 'analyse-night')).toEqual([])
  const noon = { now: () => new Date('2026-03-07T11:05:00Z') }
  await tick({ database: test.database, clock: noon })
  const final = (await queuedJobs(test)).filter((job) => job.task === 'analyse-night')
  expect(final.map((job) => job.payload.date)).toEqual(['2026-03-06'])
  const [run] = await test.database.asSystem('test', (tx) =>
    tx.select().from(schema.nightRuns).where(eq(schema.nightRuns.localDate, '2026-03-06')),
  )
  expect(run?.provisional).toBe(true)
})

it('does not run a night again whose readings are deleted by policy, because a few stragglers came', async () => {
  const later = { now: () => new Date('2026-05-01T13:00:00Z') }
  const hour = Date.parse('2026-03-04T17:00:00Z')
  const repeats = async (readingsKeptDays: number | null) => {
    await test.database.asSystemRaw('test', (client) =>
      markLateHours(client, [
        { buildingId: building.buildingId, atMs: hour, receivedMs: later.now().getTime() - 60_000 },
      ]),
    )
    await tick({ database: test.database, clock: later, readingsKeptDays })
    expect(await marks()).toEqual([])
    return (await queuedJobs(test))
      .filter((job) => job.payload.date === '2026-03-04')
      .map((job) => job.payload.date)
  }
  expect(await repeats(30)).toEqual([])
  expect(await repeats(null)).toEqual(['2026-03-04'])
})

import { type ChildProcess, fork } from 'node:child_process'
import pino from 'pino'
import { afterAll, afterEach, beforeAll, expect, it } from 'vitest'
import { writeHeartbeat } from '@/db/changes/heartbeats'
import { queueJob } from '@/db/changes/jobs'
import * as schema from '@/db/schema'
import { startJobs } from '@/ingest/nightly/runner'
import { systemClock } from '@/lib/server/clock'
import { createMailer } from '@/lib/server/mail/mailer'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import {
  dates,
  type MeasuredBuilding,
  makeMeasuredBuilding,
  samplesOf,
  storeSamples,
} from '@/tests/support/measured-building'
import { asOwner, queuedJobs, until } from '@/tests/support/queue'

let test: TestDatabase
let building: MeasuredBuilding
const children: ChildProcess[] = []

beforeAll(async () => {
  test = await createTestDatabase()
  building = await makeMeasuredBuilding(test.database, { slug: 'runner', timeZone: 'Europe/Berlin' })
  await storeSamples(test.database, samplesOf(building, dates('2026-03-02', '2026-03-03')))
})
afterEach(() => {
  for (const child of children.splice(0)) if (child.exitCode === null) child.kill('SIGKILL')
})
afterAll(() => test.drop())

const start = () =>
  startJobs({
    database: test.database,
    ownerUrl: test.ownerUrl,
    clock: systemClock,
    log: pino({ level: 'silent' }),
    mailer: createMailer({ host: '127.0.0.1', port: 9, from: 'nobody@ebbmark.example' }),
    publicUrl: 'http://127.0.0.1:3000',
    scheduled: false,
  })

const beats = () => test.database.asSystem('test', (tx) => tx.select().from(schema.workerHeartbeats))

function startProcess(): ChildProcess {
  const child = fork('ingest/nightly/main.ts', {
    execArgv: ['--import', 'tsx'],
    env: {
      ...process.env,
      DATABASE_URL: test.appUrl,
      DATABASE_OWNER_URL: test.ownerUrl,
      LOG_LEVEL: 'silent',
      NODE_ENV: 'test',
    },
    stdio: 'ignore',
  })
  children.push(child)
  return child
}

const ready = (child: ChildProcess) =>
  new Promise<void>((resolve, reject) => {
    child.once('message', (message) =>
      (message as { ready?: boolean }).ready ? resolve() : reject(new Error(String(message))),
    )
    child.once('exit', (code) => reject(new Error(`ended with ${code} before it was ready`)))
  })

const ended = (child: ChildProcess) =>
  new Promise<number | null>((resolve) => {
    if (child.exitCode !== null) resolve(child.exitCode)
    else child.once('exit', resolve)
  })

it('lets the application queue but neither read nor change the queue', async () => {
  await expect(
    test.database.asSystemRaw('test', (client) => client.query('SELECT * FROM graphile_worker.jobs')),
  ).rejects.toThrow(/permission denied/)
  await expect(
    test.database.asSystem('test', async (tx) => {
      await queueJob(tx, { task: 'watch-sensors', payload: { buildingId: building.buildingId } })
      throw new Error('the transaction fails')
    }),
  ).rejects.toThrow('the transaction fails')
  expect(await queuedJobs(test)).toEqual([])
})

it('frees the jobs of a runner that was killed, and does them', async () => {
  const payload = { buildingId: building.buildingId, date: '2026-03-02' }
  await test.database.asSystem('test', (tx) => queueJob(tx, { task: 'analyse-night', payload }))
  // as a killed runner leaves it: job and queue locked under its name, its last beat more than a minute ago
  await asOwner(test, async (client) => {
    await client.query(
      `UPDATE graphile_worker._private_jobs SET locked_by = 'pool-gone', locked_at = now(), attempts = 1`,
    )
    await client.query(
      `UPDATE graphile_worker._private_job_queues SET locked_by = 'pool-gone', locked_at = now()`,
    )
  })
  const before = new Date(Date.now() - 61_000)
  await writeHeartbeat(test.database, {
    id: 'pool-gone',
    kind: 'jobs',
    startedAt: before,
    at: before,
    info: {},
  })
  const runner = await start()
  await until('the freed job and what it queued are done', async () => (await queuedJobs(test)).length === 0)
  expect((await beats()).map((beat) => beat.id)).toEqual([runner.workerId])
  await runner.stop()
  expect(await beats()).toEqual([])
  const runs = await test.database.asSystem('test', (tx) => tx.select().from(schema.nightRuns))
  expect(runs.map((run) => [run.localDate, run.state])).toEqual([['2026-03-02', 'done']])
})

it('leaves the jobs of a living runner alone', async () => {
  const payload = { buildingId: building.buildingId, date: '2026-03-03' }
  await test.database.asSystem('test', (tx) => queueJob(tx, { task: 'analyse-night', payload }))
  await asOwner(test, (client) =>
    client.query(`UPDATE graphile_worker._private_jobs SET locked_by = 'pool-alive', locked_at = now()`),
  )
  const now = new Date()
  await writeHeartbeat(test.database, { id: 'pool-alive', kind: 'jobs', startedAt: now, at: now, info: {} })
  const runner = await start()
  await runner.stop()
  expect((await queuedJobs(test)).map((job) => job.key)).toEqual([
    `analyse-night:${building.buildingId}:2026-03-03`,
  ])
  await asOwner(test, (client) => client.query('DELETE FROM graphile_worker._private_jobs'))
  await test.database.asSystemRaw('test', (client) => client.query('DELETE FROM worker_heartbeats'))
})

it('refuses a job whose payload cannot be understood once, without trying again', async () => {
  await test.database.asSystemRaw('test', (client) =>
    client.query(`SELECT queue_job('analyse-night', '{"buildingId": "x"}'::json, NULL)`),
  )
  const runner = await start()
  await until('the bad job is gone', async () => (await queuedJobs(test)).length === 0)
  await runner.stop()
})

it('is ready as a process, beats, does what is due, and ends in good order on SIGTERM', async () => {
  const child = startProcess()
  await ready(child)
  expect((await beats()).filter((beat) => beat.kind === 'jobs')).toHaveLength(1)
  await until('the night of 3 March is analysed', async () => {
    const runs = await test.database.asSystem('test', (tx) => tx.select().from(schema.nightRuns))
    return runs.some((run) => run.localDate === '2026-03-03' && run.state === 'done')
  })
  child.kill('SIGTERM')
  expect(await ended(child)).toBe(0)
  expect(await beats()).toEqual([])
})

it('ends when the process that started it is gone', async () => {
  const child = startProcess()
  await ready(child)
  child.disconnect()
  expect(await ended(child)).toBe(0)
})

import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest'
import { openDatabase } from '@/db/client'
import { migrateDatabase } from '@/db/migrate'
import { makeSite, rows, type TestSensor } from '@/tests/support/broker'
import { startThrowAwayCluster } from '@/tests/support/cluster'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { type Mosquitto, startMosquitto } from '@/tests/support/mosquitto'
import { co2PpmOf, finishPublishers, type Publisher, startPublishers } from '@/tests/support/publishers'
import { randomFrom } from '@/tests/support/random'
import { startIngestMain, type WorkerProcess } from '@/tests/support/worker'

const publisherCount = 8
const everyMs = 20
const seed = Number(process.env.KILL_SEED ?? Math.floor(Math.random() * 1e9))
/** Each takes about half a minute; a busy machine is given time. */
const limitMs = 300_000
/** Mosquitto answers before it writes, and writes every second: what its own kill -9 may cost. */
const unwrittenMs = 5000
const pause = (ms: number) => new Promise((resolve) => setTimeout(resolve, ms))

let db: TestDatabase
let broker: Mosquitto
let workersWanted = false
let workers: WorkerProcess[] = []
/** ends of a worker that no kill of ours explains */
const ownEnds: string[] = []

beforeAll(async () => {
  db = await createTestDatabase()
})
afterEach(async () => {
  workersWanted = false
  for (const worker of workers) await worker.end('SIGKILL')
  await broker?.remove()
})
afterAll(() => db?.drop())

async function startIngest(count: number, appUrl = db.appUrl): Promise<void> {
  broker = await startMosquitto({ persistence: true })
  workersWanted = true
  workers = []
  for (let index = 0; index < count; index++) await launch(index, count, appUrl)
}

/** Starts a worker, and again whenever it ends, as the stack does. */
async function launch(index: number, count: number, appUrl: string): Promise<void> {
  const started = await startIngestMain('ingest/worker/main.ts', {
    DATABASE_URL: appUrl,
    MQTT_URL: `mqtt://127.0.0.1:${broker.port}`,
    INGEST_WORKER: String(index + 1),
    INGEST_WORKERS: String(count),
  })
  workers[index] = started
  void started.ended.then(async (how) => {
    if (how !== 'SIGKILL' && how !== 0) ownEnds.push(`${how}: ${started.output().slice(-2000)}`)
    if (workersWanted) await launch(index, count, appUrl)
  })
}

async function start(name: string, database = db.database): Promise<Publisher[]> {
  const site = await makeSite(database, name)
  const sensors: TestSensor[] = []
  for (let index = 0; index < publisherCount; index++) sensors.push(await site.addSensor(`${name}-${index}`))
  const baseMs = Math.floor(Date.now() / 1000) * 1000 - 86_400_000
  const publishers = startPublishers(sensors, {
    port: broker.port,
    baseMs,
    everyMs,
    windowMax: 1000,
    keepaliveS: 10,
  })
  const begun = () => publishers.every((publisher) => publisher.acknowledged.size > 0)
  for (let tries = 0; tries < 1200 && !begun(); tries++) await pause(50)
  expect(begun()).toBe(true)
  return publishers
}

type Stored = Map<number, Map<number, number>>

async function storedOf(publishers: readonly Publisher[], database = db.database): Promise<Stored> {
  const stored: Stored = new Map(publishers.map(({ sensor }) => [sensor.id, new Map()]))
  const found = await rows<{ sensor_id: number; i: number; co2_ppm: number }>(
    database,
    'SELECT sensor_id, co2_ppm, (extract(epoch FROM at) - $1)::float8 AS i FROM readings WHERE sensor_id = ANY($2)',
    [publishers[0]!.baseMs / 1000, publishers.map(({ sensor }) => sensor.id)],
  )
  for (const row of found) stored.get(row.sensor_id)?.set(row.i, row.co2_ppm)
  return stored
}

/** Readings that the broker acknowledged and that are not in the table with their value, but for the excepted. */
function missingOf(publishers: readonly Publisher[], stored: Stored, excepted: Set<string>): string[] {
  return publishers.flatMap(({ sensor, salt, acknowledged }) =>
    [...acknowledged]
      .filter((i) => stored.get(sensor.id)?.get(i) !== co2PpmOf(salt, i))
      .map((i) => `${sensor.deviceId} ${i}`)
      .filter((name) => !excepted.has(name)),
  )
}

const acknowledgedBy = (publishers: readonly Publisher[]) =>
  publishers.reduce((sum, { acknowledged }) => sum + acknowledged.size, 0)

/** Waits until nothing more comes that could fill what is missing. */
async function settled(
  publishers: readonly Publisher[],
  excepted: Set<string>,
  database = db.database,
): Promise<string[]> {
  let missing: string[] = []
  for (let tries = 0; tries < 120; tries++) {
    missing = missingOf(publishers, await storedOf(publishers, database), excepted)
    if (missing.length === 0) return missing
    await pause(500)
  }
  for (const worker of workers) console.log(worker.output().slice(-3000))
  return missing
}

async function expectGoodOrder(database = db.database): Promise<void> {
  expect(await rows(database, 'SELECT source, reason, detail FROM refused_messages')).toEqual([])
  expect(ownEnds).toEqual([])
}

describe('beside an outside broker under load', () => {
  it(
    'kill -9 and SIGTERM of two workers at random: every reading that the broker acknowledged is stored once',
    async () => {
      console.log(`outside-broker kill test: KILL_SEED=${seed}`)
      const random = randomFrom(seed)
      await startIngest(2)
      const publishers = await start('sluice')
      const done: string[] = []
      for (let round = 0; round < 8; round++) {
        await pause(300 + random() * 2000)
        const index = random() < 0.5 ? 0 : 1
        const signal = random() < 0.7 ? 'SIGKILL' : 'SIGTERM'
        const both = random() < 0.3
        done.push(`${signal} ${both ? 'both' : index + 1}`)
        await Promise.all((both ? [0, 1] : [index]).map((each) => workers[each]?.end(signal)))
      }
      await finishPublishers(publishers, 60_000)
      expect(await settled(publishers, new Set())).toEqual([])
      console.log(`${done.join(', ')}: ${acknowledgedBy(publishers)} acknowledged, all stored`)
      expect(publishers.map(({ waiting }) => waiting)).toEqual(publishers.map(() => 0))
      await expectGoodOrder()
    },
    limitMs,
  )

  it(
    'kill -9 of the broker, of the only worker and the broker: all is stored but what the broker had not yet written itself',
    async () => {
      const random = randomFrom(seed + 1)
      await startIngest(1)
      const publishers = await start('culvert')
      const sizes: { atMs: number; sizes: number[] }[] = []
      const look = () => publishers.map(({ acknowledged }) => acknowledged.size)
      const sampling = setInterval(() => sizes.push({ atMs: Date.now(), sizes: look() }), 100)
      const excepted = new Set<string>()
      for (let round = 0; round < 3; round++) {
        await pause(unwrittenMs + 1000 + random() * 1000)
        const before = sizes.findLast(({ atMs }) => atMs < Date.now() - unwrittenMs)!.sizes
        if (random() < 0.6) await workers[0]?.end('SIGKILL')
        await broker.end('SIGKILL')
        await pause(1500)
        for (const [index, { sensor, acknowledged }] of publishers.entries())
          for (const i of [...acknowledged].slice(before[index])) excepted.add(`${sensor.deviceId} ${i}`)
        await broker.restart()
      }
      clearInterval(sampling)
      await pause(1000)
      await finishPublishers(publishers, 60_000)
      expect(await settled(publishers, excepted)).toEqual([])
      const lost = missingOf(publishers, await storedOf(publishers), new Set()).length
      console.log(
        `three kills of Mosquitto: ${acknowledgedBy(publishers)} acknowledged, ${lost} lost by Mosquitto within its writing interval`,
      )
      expect(excepted.size).toBeLessThan(acknowledgedBy(publishers))
      await expectGoodOrder()
    },
    limitMs,
  )

  it(
    'PostgreSQL stopped and started again: the worker gives its messages back, the broker keeps them, all is stored',
    async () => {
      const cluster = await startThrowAwayCluster()
      const appUrl = `postgres://ebbmark_app@127.0.0.1:${cluster.port}/ebbmark`
      await migrateDatabase(`postgres://ebbmark_owner@127.0.0.1:${cluster.port}/ebbmark`, new Date())
      const database = openDatabase({ url: appUrl, poolSize: 2 })
      try {
        await startIngest(2, appUrl)
        const publishers = await start('penstock', database)
        await pause(1000)
        await cluster.stop()
        await pause(8000)
        const before = acknowledgedBy(publishers)
        expect(workers.map((worker) => worker.output()).join()).toContain('the database takes no readings')
        await pause(1000)
        // the broker goes on taking what the sensors send
        expect(acknowledgedBy(publishers)).toBeGreaterThan(before)
        await cluster.restart()
        await pause(2000)
        await finishPublishers(publishers, 60_000)
        expect(await settled(publishers, new Set(), database)).toEqual([])
        expect(workers.map((worker) => worker.output()).join()).toContain('the database takes readings again')
        await expectGoodOrder(database)
      } finally {
        workersWanted = false
        for (const worker of workers) await worker.end('SIGTERM')
        await database.close()
        await cluster.remove()
      }
    },
    limitMs,
  )
})

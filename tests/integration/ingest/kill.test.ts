import fs from 'node:fs'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { type Database, openDatabase } from '@/db/client'
import { migrateDatabase } from '@/db/migrate'
import { type BrokerProcess, makeSite, rows, startBroker, type TestSensor } from '@/tests/support/broker'
import { freePort, startThrowAwayCluster } from '@/tests/support/cluster'
import { co2PpmOf, finishPublishers, type Publisher, startPublishers } from '@/tests/support/publishers'
import { randomFrom } from '@/tests/support/random'

const publisherCount = 20
const everyMs = 30
const seed = Number(process.env.KILL_SEED ?? Math.floor(Math.random() * 1e9))
/** Each takes about half a minute; a busy machine is given time. */
const limitMs = 300_000
const pause = (ms: number) => new Promise((resolve) => setTimeout(resolve, ms))

let cluster: Awaited<ReturnType<typeof startThrowAwayCluster>>
let database: Database
let port: number
let broker: BrokerProcess | undefined
let brokerWanted = true
const output: string[] = []
/** ends of the broker that no kill of ours explains */
const ownEnds: string[] = []
const appUrl = () => `postgres://ebbmark_app@127.0.0.1:${cluster.port}/ebbmark`

beforeAll(async () => {
  cluster = await startThrowAwayCluster()
  await migrateDatabase(`postgres://ebbmark_owner@127.0.0.1:${cluster.port}/ebbmark`, new Date())
  database = openDatabase({ url: appUrl(), poolSize: 2 })
  port = await freePort()
  await launch()
})
afterAll(async () => {
  brokerWanted = false
  await broker?.end('SIGKILL')
  await database?.close()
  await cluster?.remove()
})

/** Starts the broker, and again whenever it ends, as the stack does. */
async function launch(): Promise<void> {
  const started = await startBroker({ appUrl: appUrl(), port })
  broker = started
  void started.ended.then(async (how) => {
    output.push(started.output())
    if (how !== 'SIGKILL' && how !== 0) ownEnds.push(`${how}: ${started.output().slice(-2000)}`)
    if (brokerWanted) await launch()
  })
}

function postmasterPid(): number {
  return Number(fs.readFileSync(`${cluster.dir}/postmaster.pid`, 'utf8').split('\n')[0])
}

function childrenOf(pid: number): number[] {
  return fs
    .readdirSync('/proc')
    .filter((name) => /^\d+$/.test(name))
    .filter((name) => {
      try {
        return fs.readFileSync(`/proc/${name}/stat`, 'utf8').split(') ')[1]?.split(' ')[1] === String(pid)
      } catch {
        return false
      }
    })
    .map(Number)
}

function isAlive(pid: number): boolean {
  try {
    process.kill(pid, 0)
    return fs.readFileSync(`/proc/${pid}/stat`, 'utf8').split(') ')[1]?.[0] !== 'Z'
  } catch {
    return false
  }
}

function signal(pid: number, name: NodeJS.Signals): void {
  try {
    process.kill(pid, name)
  } catch {
    // it has just ended by itself
  }
}

/** Starts PostgreSQL again after kill -9: its orphaned workers must have gone first. */
async function restartPostgres(orphans: readonly number[]): Promise<void> {
  while (orphans.some(isAlive)) await pause(20)
  await cluster.restart()
}

const killers: Record<string, (random: () => number) => Promise<void>> = {
  'kill -9 broker': async () => {
    await broker?.end('SIGKILL')
  },
  'kill -9 one PostgreSQL backend': async (random) => {
    const backends = childrenOf(postmasterPid())
    signal(backends[Math.floor(random() * backends.length)] ?? 0, 'SIGKILL')
  },
  'kill -9 postmaster': async () => {
    const pid = postmasterPid()
    const orphans = childrenOf(pid)
    signal(pid, 'SIGKILL')
    await restartPostgres([pid, ...orphans])
  },
  'kill -9 broker and postmaster': async () => {
    const pid = postmasterPid()
    const orphans = childrenOf(pid)
    signal(pid, 'SIGKILL')
    await broker?.end('SIGKILL')
    await restartPostgres([pid, ...orphans])
  },
  'SIGTERM broker': async () => {
    await broker?.end('SIGTERM')
  },
}

async function startTwenty(name: string, keepaliveS: number): Promise<Publisher[]> {
  const site = await makeSite(database, name)
  const sensors: TestSensor[] = []
  for (let index = 0; index < publisherCount; index++) sensors.push(await site.addSensor(`${name}-${index}`))
  const baseMs = Math.floor(Date.now() / 1000) * 1000 - 86_400_000
  const publishers = startPublishers(sensors, { port, baseMs, everyMs, windowMax: 1000, keepaliveS })
  const begun = () => publishers.every((publisher) => publisher.acknowledged.size > 0)
  for (let tries = 0; tries < 1200 && !begun(); tries++) await pause(50)
  expect(begun()).toBe(true)
  return publishers
}

type Row = { sensor_id: number; i: number; co2_ppm: number }

/** Every acknowledged reading is in the table once with its value; nothing is there that was never sent; nothing was refused. */
async function expectNothingLost(publishers: readonly Publisher[]): Promise<void> {
  const stored = new Map<number, Map<number, number>>(publishers.map(({ sensor }) => [sensor.id, new Map()]))
  const baseMs = publishers[0]!.baseMs
  const found = await rows<Row>(
    database,
    'SELECT sensor_id, co2_ppm, (extract(epoch FROM at) - $1)::float8 AS i FROM readings WHERE sensor_id = ANY($2)',
    [baseMs / 1000, publishers.map(({ sensor }) => sensor.id)],
  )
  for (const row of found) stored.get(row.sensor_id)?.set(row.i, row.co2_ppm)
  const faults: string[] = []
  for (const { sensor, salt, acknowledged, sent } of publishers) {
    const of = stored.get(sensor.id)!
    for (const i of acknowledged)
      if (of.get(i) !== co2PpmOf(salt, i)) faults.push(`${sensor.deviceId} ${i} acknowledged and not stored`)
    for (const i of of.keys())
      if (!(i >= 0 && i < sent)) faults.push(`${sensor.deviceId} ${i} stored and never sent`)
  }
  expect(faults.slice(0, 10)).toEqual([])
  const newest = await rows<{ wrong: number }>(
    database,
    `SELECT count(*)::int AS wrong FROM (SELECT sensor_id, max(at) AS at FROM readings GROUP BY 1) r
     FULL JOIN latest_readings l USING (sensor_id) WHERE l.at IS DISTINCT FROM r.at`,
  )
  expect(newest[0]?.wrong).toBe(0)
  expect(await rows(database, 'SELECT source, reason, count FROM refused_messages')).toEqual([])
  expect(ownEnds).toEqual([])
}

const sum = (publishers: readonly Publisher[], of: (publisher: Publisher) => number) =>
  publishers.reduce((total, publisher) => total + of(publisher), 0)

describe('under load of twenty publisher processes', () => {
  it(
    'kill -9 of broker, backends and postmaster at random loses no acknowledged reading',
    async () => {
      console.log(`kill test: KILL_SEED=${seed}`)
      const random = randomFrom(seed)
      const publishers = await startTwenty('weir', 10)
      const startedMs = Date.now()
      const names = Object.keys(killers)
      const done: string[] = []
      // each kind once in a random order, then by chance, until 15 s are over
      const order = names.map((name) => ({ name, at: random() })).sort((a, b) => a.at - b.at)
      for (let round = 0; Date.now() - startedMs < 15_000 || round < names.length; round++) {
        await pause(300 + random() * 2200)
        const name = order[round]?.name ?? names[Math.floor(random() * names.length)]!
        done.push(name)
        await killers[name]!(random)
      }
      const seconds = (Date.now() - startedMs) / 1000
      const sent = sum(publishers, (publisher) => publisher.sent)
      await finishPublishers(publishers, 60_000)
      const acknowledged = sum(publishers, (publisher) => publisher.acknowledged.size)
      console.log(`${done.join(', ')}: ${sent} sent in ${seconds.toFixed(0)} s, ${acknowledged} acknowledged`)
      expect(sent / seconds).toBeGreaterThanOrEqual(500)
      await expectNothingLost(publishers)
      expect(sum(publishers, (publisher) => publisher.waiting)).toBe(0)
      expect(acknowledged).toBe(sum(publishers, (publisher) => publisher.sent))
    },
    limitMs,
  )

  it(
    'PostgreSQL frozen, then stopped, each for three keep-alives: nothing is lost and every sensor is up to date',
    async () => {
      const keepaliveS = 3
      const publishers = await startTwenty('lock', keepaliveS)
      const pid = postmasterPid()
      const all = [pid, ...childrenOf(pid)]
      for (const each of all) signal(each, 'SIGSTOP')
      await pause(3000 * keepaliveS)
      for (const each of all) signal(each, 'SIGCONT')
      const before = sum(publishers, (publisher) => publisher.acknowledged.size)
      for (let tries = 0; tries < 300 && sum(publishers, (p) => p.acknowledged.size) < before + 2000; tries++)
        await pause(50)
      await cluster.stop()
      await pause(3000 * keepaliveS)
      await cluster.restart()
      await pause(1000)
      await finishPublishers(publishers, 60_000)
      await expectNothingLost(publishers)
      expect(sum(publishers, (publisher) => publisher.acknowledged.size)).toBe(
        sum(publishers, (publisher) => publisher.sent),
      )
      const log = [...output, broker?.output()].join('')
      expect(log).toContain('the database takes no readings')
      expect(log).toContain('the database takes readings again')
    },
    limitMs,
  )
})

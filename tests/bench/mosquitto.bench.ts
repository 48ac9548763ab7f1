import { spawn } from 'node:child_process'
import { cpus } from 'node:os'
import path from 'node:path'
import { type Database, openDatabase } from '@/db/client'
import { migrateDatabase } from '@/db/migrate'
import { makeSite, rows, startBroker, type TestSensor } from '../support/broker'
import { startThrowAwayCluster } from '../support/cluster'
import { startMosquitto } from '../support/mosquitto'
import { startIngestMain } from '../support/worker'
import { makeDurable } from './ingest/durable'
import { type Usage, usageOf } from './ingest/processes'
import { options, printTable, wholeNumber, writeReport } from './report'

const chosen = options({ connections: '50', singles: '100000', arrays: '6000', window: '64' })
const connections = wholeNumber('connections', chosen.connections, 1)
const singles = wholeNumber('singles', chosen.singles, 1)
const arrays = wholeNumber('arrays', chosen.arrays, 1)
const window = wholeNumber('window', chosen.window, 1)

/** Processes that take the messages, and the port to publish to. */
type Taker = { port: number; ingest: readonly number[]; broker: number | null; end: () => Promise<void> }
type Way = { name: string; start: () => Promise<Taker> }
type Result = {
  name: string
  kind: string
  readings: number
  answeredS: number
  committedS: number
  readingsPerS: number
  ingest: Usage
  broker: Usage
  postgres: Usage
}

const cluster = await startThrowAwayCluster()
const appUrl = `postgres://ebbmark_app@127.0.0.1:${cluster.port}/ebbmark`
const env = { DATABASE_URL: appUrl, LOG_LEVEL: 'warn', MQTT_SENSOR_READINGS_PER_S: '1000000' }

/** Mosquitto with some processes of the ingest beside it. */
async function beside(
  mains: readonly [main: string, env: Record<string, string>, words?: string[]][],
): Promise<Taker> {
  const mosquitto = await startMosquitto()
  const url = { MQTT_URL: `mqtt://127.0.0.1:${mosquitto.port}` }
  const processes: Awaited<ReturnType<typeof startIngestMain>>[] = []
  for (const [main, more, words] of mains)
    processes.push(await startIngestMain(main, { ...env, ...url, ...more }, words))
  await new Promise((resolve) => setTimeout(resolve, 1500))
  return {
    port: mosquitto.port,
    broker: mosquitto.pid(),
    ingest: processes.map(({ pid }) => pid),
    end: async () => {
      for (const each of processes) await each.end('SIGTERM')
      await mosquitto.remove()
    },
  }
}

const worker = 'ingest/worker/main.ts'
const ways: readonly Way[] = [
  {
    name: 'embedded broker',
    start: async () => {
      const broker = await startBroker({ appUrl, env })
      return {
        port: broker.port,
        ingest: [broker.pid],
        broker: null,
        end: async () => void (await broker.end('SIGTERM')),
      }
    },
  },
  { name: 'Mosquitto, one worker (own subscriber)', start: () => beside([[worker, {}]]) },
  {
    name: 'Mosquitto, two workers (own subscriber)',
    start: () =>
      beside([
        [worker, { INGEST_WORKERS: '2' }],
        [worker, { INGEST_WORKERS: '2', INGEST_WORKER: '2' }],
      ]),
  },
  ...[16, 64, 256].map((sessions) => ({
    name: `Mosquitto, ${sessions} sessions of mqtt.js`,
    start: () => beside([['tests/bench/mosquitto/mqttjs-worker.ts', {}, [String(sessions)]]]),
  })),
]

try {
  await bench()
} finally {
  await cluster.remove()
}

async function bench(): Promise<void> {
  await migrateDatabase(`postgres://ebbmark_owner@127.0.0.1:${cluster.port}/ebbmark`, new Date())
  await makeDurable(cluster.superuserUrl)
  const database = openDatabase({ url: appUrl, poolSize: 2 })
  const site = await makeSite(database, 'bench')
  const sensors: TestSensor[] = []
  for (let index = 0; index < connections; index++) sensors.push(await site.addSensor(`bench-${index}`))
  console.log(
    `${cpus().length} × ${cpus()[0]?.model ?? 'unknown processor'}, Node ${process.version}, PostgreSQL with fsync on.`,
  )
  console.log(
    `${connections} connections publish with QoS 1 as fast as the broker answers; the clock runs until the last row is committed.`,
  )
  console.log('Load generator, broker, ingest and PostgreSQL share the cores.\n')
  const results: Result[] = []
  let baseMs = Date.now() - 20 * 60_000
  for (const [kind, perMessage, messages] of [
    ['single readings', 1, singles],
    ['arrays of 50', 50, arrays],
  ] as const)
    for (const way of ways) {
      baseMs -= 10 * 60_000
      results.push(await measure({ way, kind, perMessage, messages, database, sensors, baseMs }))
      printLine(results.at(-1)!)
    }
  print(results)
  writeReport('mosquitto', { node: process.version, cores: cpus().length, connections, window, results })
  await database.close()
}

type Plan = {
  way: Way
  kind: string
  perMessage: number
  messages: number
  database: Database
  sensors: readonly TestSensor[]
  baseMs: number
}

async function measure(plan: Plan): Promise<Result> {
  const { way, kind, perMessage, messages, database, sensors, baseMs } = plan
  const taker = await way.start()
  const devices = sensors.map(({ deviceId, secret, topic }) => ({ deviceId, secret, topic }))
  const each = Math.ceil(messages / sensors.length)
  const readings = each * sensors.length * perMessage
  const most = perMessage === 1 ? window : 4
  const words = JSON.stringify({ port: taker.port, devices, window: most, perMessage, baseMs, each })
  const usage = () => ({
    ingest: sumOf(taker.ingest.map((pid) => usageOf(pid))),
    broker: taker.broker === null ? { cpuS: 0, memoryMb: 0 } : usageOf(taker.broker),
    postgres: usageOf(cluster.pid, true),
  })
  const before = usage()
  const startedMs = performance.now()
  const sinceS = () => (performance.now() - startedMs) / 1000
  const child = spawn(process.execPath, [path.resolve('tests/bench/ingest/generator.mjs'), words], {
    stdio: ['ignore', 'inherit', 'inherit', 'ipc'],
  })
  let answeredS = Number.NaN
  child.once('message', () => (answeredS = sinceS()))
  const lastMs = baseMs + each * perMessage - 1
  while (
    (await lastStored(database, sensors, lastMs)) < sensors.length ||
    (await stored(database, baseMs)) < readings
  ) {
    if (sinceS() > 180)
      throw new Error(`${way.name}: ${await stored(database, baseMs)} of ${readings} stored`)
    await new Promise((resolve) => setTimeout(resolve, 100))
  }
  const committedS = sinceS()
  const after = usage()
  await taker.end()
  const used = (who: 'ingest' | 'broker' | 'postgres'): Usage => ({
    cpuS: (after[who].cpuS - before[who].cpuS) / committedS,
    memoryMb: after[who].memoryMb,
  })
  return {
    name: way.name,
    kind,
    readings,
    answeredS,
    committedS,
    readingsPerS: readings / committedS,
    ingest: used('ingest'),
    broker: used('broker'),
    postgres: used('postgres'),
  }
}

function sumOf(usages: readonly Usage[]): Usage {
  return usages.reduce(
    (sum, each) => ({ cpuS: sum.cpuS + each.cpuS, memoryMb: sum.memoryMb + each.memoryMb }),
    { cpuS: 0, memoryMb: 0 },
  )
}

/** Sensors whose last reading is there: costs little while thousands are still on their way. */
async function lastStored(
  database: Database,
  sensors: readonly TestSensor[],
  lastMs: number,
): Promise<number> {
  const [row] = await rows<{ count: number }>(
    database,
    'SELECT count(*)::int AS count FROM readings WHERE sensor_id = ANY($1) AND at = to_timestamp($2::float8 / 1000)',
    [sensors.map(({ id }) => id), lastMs],
  )
  return row!.count
}

/** Rows of this run: its instants lie within ten minutes that no other run uses. */
async function stored(database: Database, baseMs: number): Promise<number> {
  const [row] = await rows<{ count: number }>(
    database,
    `SELECT count(*)::int AS count FROM readings WHERE at >= to_timestamp($1::float8 / 1000) AND at < to_timestamp($1::float8 / 1000 + 600)`,
    [baseMs],
  )
  return row!.count
}

function printLine(result: Result): void {
  console.log(`${result.kind}, ${result.name}: ${result.readingsPerS.toFixed(0)} readings/s`)
}

function print(results: readonly Result[]): void {
  const part = (usage: Usage) => `${(usage.cpuS * 100).toFixed(0)} % ${usage.memoryMb.toFixed(0)} MB`
  console.log('\nMQTT QoS 1 to committed rows')
  printTable(
    ['', 'published s', 'committed s', 'readings/s', 'of embedded', 'ingest', 'Mosquitto', 'PostgreSQL'],
    results.map((result) => {
      const embedded = results.find((each) => each.kind === result.kind)!
      return [
        `${result.kind}, ${result.name}`,
        result.answeredS.toFixed(1),
        result.committedS.toFixed(1),
        result.readingsPerS.toFixed(0),
        (result.readingsPerS / embedded.readingsPerS).toFixed(2),
        part(result.ingest),
        result.broker.memoryMb === 0 ? '–' : part(result.broker),
        part(result.postgres),
      ]
    }),
  )
}

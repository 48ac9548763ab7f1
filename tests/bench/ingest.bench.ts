import { spawn } from 'node:child_process'
import { cpus } from 'node:os'
import path from 'node:path'
import { type Database, openDatabase } from '@/db/client'
import { migrateDatabase } from '@/db/migrate'
import { makeSite, rows, startBroker, type TestSensor } from '../support/broker'
import { startThrowAwayCluster } from '../support/cluster'
import { makeDurable } from './ingest/durable'
import { type Usage, usageOf } from './ingest/processes'
import { type Raw, rawInserts } from './ingest/raw'
import { options, printTable, wholeNumber, writeReport } from './report'

const chosen = options({ seconds: '8', connections: '50', window: '64' })
const seconds = wholeNumber('seconds', chosen.seconds, 1)
const connections = wholeNumber('connections', chosen.connections, 1)
const window = wholeNumber('window', chosen.window, 1)

type Run = {
  name: string
  messagesPerS: number
  readingsPerS: number
  medianMs: number
  p95Ms: number
  broker: Usage
  postgres: Usage
  generator: Usage
}

const cluster = await startThrowAwayCluster()
const ownerUrl = `postgres://ebbmark_owner@127.0.0.1:${cluster.port}/ebbmark`
const appUrl = `postgres://ebbmark_app@127.0.0.1:${cluster.port}/ebbmark`
try {
  await bench()
} finally {
  await cluster.remove()
}

async function bench(): Promise<void> {
  await migrateDatabase(ownerUrl, new Date())
  await makeDurable(cluster.superuserUrl)
  const database = openDatabase({ url: appUrl, poolSize: 2 })
  const site = await makeSite(database, 'bench')
  const sensors: TestSensor[] = []
  for (let index = 0; index < connections; index++) sensors.push(await site.addSensor(`bench-${index}`))
  console.log(
    `${cpus().length} × ${cpus()[0]?.model ?? 'unknown processor'}, Node ${process.version}, PostgreSQL with fsync on.`,
  )
  console.log(
    `${connections} connections, at most ${window} messages each unacknowledged (arrays: 4); ${seconds} s after 2 s of warm-up.`,
  )
  console.log(
    'Load generator, broker and PostgreSQL share the cores. The rate limit of one sensor is lifted.\n',
  )
  const runs: Run[] = []
  for (const [name, perMessage, most] of [
    ['single readings', 1, window],
    ['arrays of 50', 50, 4],
  ] as const)
    runs.push(await measure({ name, perMessage, most, database, sensors }))
  const raw = await rawInserts({
    url: appUrl,
    superuserUrl: `postgres://postgres@127.0.0.1:${cluster.port}/ebbmark`,
    seconds: Math.min(4, seconds),
    sensorIds: sensors.map((sensor) => sensor.id),
    baseMs: Date.now() - 20 * 86_400_000,
  })
  print(runs, raw)
  writeReport('ingest', {
    node: process.version,
    cores: cpus().length,
    connections,
    window,
    seconds,
    runs,
    raw,
  })
  await database.close()
}

async function countReadings(database: Database): Promise<number> {
  const [row] = await rows<{ count: number }>(database, 'SELECT count(*)::int AS count FROM readings')
  return row!.count
}

async function measure(plan: {
  name: string
  perMessage: number
  most: number
  database: Database
  sensors: readonly TestSensor[]
}): Promise<Run> {
  const { name, perMessage, most, database, sensors } = plan
  const broker = await startBroker({
    appUrl,
    env: { MQTT_SENSOR_READINGS_PER_S: '1000000', LOG_LEVEL: 'warn' },
  })
  const devices = sensors.map(({ deviceId, secret, topic }) => ({ deviceId, secret, topic }))
  const baseMs = Date.now() - (perMessage === 1 ? 1_500_000 : 1_200_000)
  const words = JSON.stringify({ port: broker.port, devices, window: most, perMessage, seconds, baseMs })
  const before = await countReadings(database)
  const child = spawn(process.execPath, [path.resolve('tests/bench/ingest/generator.mjs'), words], {
    stdio: ['ignore', 'inherit', 'inherit', 'ipc'],
  })
  const usage = () => ({
    broker: usageOf(broker.pid),
    postgres: usageOf(cluster.pid, true),
    generator: usageOf(child.pid!),
  })
  type Said = { phase: string; messages: number; latenciesMs: number[] }
  let start = usage()
  const said = await new Promise<{ answer: Said; end: ReturnType<typeof usage> }>((resolve, reject) => {
    child.on('message', (message: Said) => {
      if (message.phase === 'measuring') start = usage()
      else resolve({ answer: message, end: usage() })
    })
    child.on('exit', (code) => reject(new Error(`the load generator ended with ${code}\n${broker.output()}`)))
  })
  await new Promise((resolve) => child.once('exit', resolve))
  await broker.end('SIGTERM')
  const stored = (await countReadings(database)) - before
  const { answer, end } = said
  if (stored < answer.messages * perMessage)
    throw new Error(`${answer.messages * perMessage} readings acknowledged, ${stored} stored`)
  const used = (who: 'broker' | 'postgres' | 'generator'): Usage => ({
    cpuS: (end[who].cpuS - start[who].cpuS) / seconds,
    memoryMb: end[who].memoryMb,
  })
  return {
    name,
    messagesPerS: answer.messages / seconds,
    readingsPerS: (answer.messages * perMessage) / seconds,
    medianMs: answer.latenciesMs[Math.floor(answer.latenciesMs.length * 0.5)] ?? Number.NaN,
    p95Ms: answer.latenciesMs[Math.floor(answer.latenciesMs.length * 0.95)] ?? Number.NaN,
    broker: used('broker'),
    postgres: used('postgres'),
    generator: used('generator'),
  }
}

function print(runs: readonly Run[], raw: readonly Raw[]): void {
  const part = (usage: Usage) => `${(usage.cpuS * 100).toFixed(0)} % ${usage.memoryMb.toFixed(0)} MB`
  console.log('MQTT QoS 1 to committed rows, acknowledged after the commit')
  printTable(
    ['', 'messages/s', 'readings/s', 'median ms', '95 % ms', 'broker', 'PostgreSQL', 'generator'],
    runs.map((run) => [
      run.name,
      run.messagesPerS.toFixed(0),
      run.readingsPerS.toFixed(0),
      run.medianMs.toFixed(0),
      run.p95Ms.toFixed(0),
      part(run.broker),
      part(run.postgres),
      part(run.generator),
    ]),
  )
  const best = Math.max(...raw.map((each) => each.rowsPerS))
  console.log('\nthe same table without a broker, one connection')
  printTable(
    ['', 'rows/s', 'of the fastest'],
    raw.map((each) => [each.name, each.rowsPerS.toFixed(0), (each.rowsPerS / best).toFixed(3)]),
  )
  for (const run of runs) console.log(`${run.name}: ${(run.readingsPerS / best).toFixed(3)} of the fastest`)
}

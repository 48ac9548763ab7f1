import { type ChildProcess, spawn } from 'node:child_process'
import fs from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { demoKey, sensorSecret } from '@/ingest/simulator/demo-files'
import { forEachReading, makeHistory } from '@/ingest/simulator/history'
import { LiveMill, wallClock } from '@/ingest/simulator/live/mill'
import { SensorClient } from '@/ingest/simulator/live/sensor-client'
import { type SeededDemo, seedDemo } from '@/ingest/simulator/load'
import { type BrokerProcess, eventually, rows, startBroker } from '@/tests/support/broker'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'

const SPEED = 90
const MINUTES = 24

let db: TestDatabase
let dataDir: string
let broker: BrokerProcess
let demo: SeededDemo
let clients: (SensorClient | null)[] = []
let child: ChildProcess | undefined
const startMs = (Math.floor(Date.now() / 60_000) - MINUTES - 5) * 60_000

beforeAll(async () => {
  db = await createTestDatabase()
  dataDir = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-live-'))
  demo = await seedDemo({ database: db.database, dataDir, now: new Date(startMs), historyS: 2 * 86400 })
  broker = await startBroker({ appUrl: db.appUrl })
})
afterAll(async () => {
  child?.kill('SIGKILL')
  await Promise.all(clients.map((client) => client?.end(1000)))
  await broker?.end('SIGTERM')
  await db?.drop()
  fs.rmSync(dataDir, { recursive: true, force: true })
})

/** Waits until it is so; the expectation after it says what was not. */
const until = (isSo: () => boolean, ms = 60_000) => eventually(async () => isSo(), Boolean, ms)

const connect = (secretOf: (deviceId: string) => string, troubles: string[]) =>
  demo.world.scenario.sensors.map(({ deviceId }) =>
    deviceId === demo.world.story.silentSensor.deviceId
      ? null
      : new SensorClient({
          url: `mqtt://127.0.0.1:${broker.port}`,
          site: demo.world.scenario.building.slug,
          deviceId,
          secret: secretOf(deviceId),
          onTrouble: (words) => troubles.push(words),
        }),
  )

it('publishes each minute as thirty sensors with their own credentials; none is lost when the broker is killed', async () => {
  const key = demoKey(dataDir)
  clients = connect((deviceId) => sensorSecret(key, deviceId), [])
  const endS = startMs / 1000 + MINUTES * 60
  const fast = wallClock(SPEED, startMs / 1000)
  // time stops at the end, so that nothing is published from the future
  const clock = { ...fast, nowS: () => Math.min(endS - 1, fast.nowS()) }
  const mill = new LiveMill(demo.world, demo.state, clients, clock)
  mill.start()
  await until(() => fast.nowS() > startMs / 1000 + 8 * 60)
  await broker.end('SIGKILL')
  await until(() => fast.nowS() > startMs / 1000 + 14 * 60)
  broker = await startBroker({ appUrl: db.appUrl, port: broker.port })
  await until(() => fast.nowS() > endS)
  mill.catchUp()
  await until(() => clients.every((client) => client === null || client.waiting === 0))
  mill.stop()

  const expected: string[] = []
  for (const batch of makeHistory(demo.world, { fromS: startMs / 1000, toS: endS }))
    forEachReading(batch, (s, t, co2, temperature, humidity) =>
      expected.push(`${demo.world.scenario.sensors[s]!.deviceId} ${t} ${co2} ${temperature} ${humidity}`),
    )
  const found = await rows<{ line: string }>(
    db.database,
    `SELECT s.device_id || ' ' || extract(epoch FROM r.at)::int || ' ' || r.co2_ppm || ' ' || r.temp_c || ' ' || r.rh_pct AS line
     FROM readings r JOIN sensors s ON s.id = r.sensor_id WHERE r.at >= to_timestamp(${startMs / 1000})`,
  )
  expect(found.map((row) => row.line).sort()).toEqual(expected.sort())
  expect(await rows(db.database, 'SELECT reason, detail FROM refused_messages')).toEqual([])
})

it('says so, and keeps its readings, when the broker refuses a secret', async () => {
  const troubles: string[] = []
  const wrong = new SensorClient({
    url: `mqtt://127.0.0.1:${broker.port}`,
    site: 'sallow-mill',
    deviceId: 'sm-105',
    secret: 'f'.repeat(32),
    onTrouble: (words) => troubles.push(words),
  })
  wrong.take({
    t: new Date(startMs).toISOString(),
    co2_ppm: 700,
    temp_c: 20,
    rh_pct: 40,
    battery_pct: 90,
    rssi_dbm: -60,
  })
  await until(() => troubles.length > 0)
  expect(troubles[0]).toMatch(/broker refused sm-105/)
  expect(wrong.waiting).toBe(1)
  await wrong.end(500)
})

it('as a process: fills what is missing, publishes on, beats, and ends in order on SIGTERM', async () => {
  await Promise.all(clients.map((client) => client?.end(1000)))
  clients = []
  child = spawn(process.execPath, ['--import', 'tsx', 'ingest/simulator/live.ts'], {
    env: {
      ...process.env,
      DATABASE_URL: db.appUrl,
      EBBMARK_DATA_DIR: dataDir,
      MQTT_HOST: '127.0.0.1',
      MQTT_PORT: String(broker.port),
    },
    stdio: ['ignore', 'pipe', 'pipe', 'ipc'],
  })
  let output = ''
  child.stdout?.on('data', (chunk) => (output += chunk))
  child.stderr?.on('data', (chunk) => (output += chunk))
  const ended = new Promise<number | null>((resolve) => child?.once('exit', resolve))
  const isReady = await Promise.race([
    new Promise<boolean>((resolve) => child?.once('message', () => resolve(true))),
    ended.then(() => false),
  ])
  expect(isReady, output).toBe(true)
  const readyAt = new Date()
  // no gap: of a sensor that reports (sm-105 is the silent one), no two readings lie further apart than its radio may be away
  const gaps = await rows<{ device: string }>(
    db.database,
    `SELECT s.device_id AS device FROM sensors s, LATERAL (SELECT r.at - lag(r.at) OVER (ORDER BY r.at) AS gap
       FROM readings r WHERE r.sensor_id = s.id) g WHERE g.gap > interval '75 minutes' AND s.device_id <> 'sm-105'`,
  )
  expect(gaps).toEqual([])
  const fresh = await eventually(
    () =>
      rows<{ n: number }>(db.database, 'SELECT count(*)::int AS n FROM readings WHERE at > $1', [readyAt]),
    (found) => (found[0]?.n ?? 0) > 2,
    60_000,
  )
  expect(fresh[0]!.n).toBeGreaterThan(2)
  const beats = () => rows(db.database, `SELECT id FROM worker_heartbeats WHERE kind = 'demo'`)
  expect(await beats()).toHaveLength(1)
  child.kill('SIGTERM')
  expect(await ended, output).toBe(0)
  expect(await beats()).toHaveLength(0)
})

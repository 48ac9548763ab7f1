import net from 'node:net'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import {
  type BrokerProcess,
  connectSensor,
  eventually,
  makeSite,
  publish,
  refusedWith,
  rows,
  startBroker,
  type TestSite,
} from '@/tests/support/broker'
import { freePort } from '@/tests/support/cluster'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'

let db: TestDatabase
let broker: BrokerProcess
let site: TestSite

beforeAll(async () => {
  db = await createTestDatabase()
  site = await makeSite(db.database, 'ropewalk')
  broker = await startBroker({ appUrl: db.appUrl, env: { MQTT_SENSOR_READINGS_PER_S: '20' } })
})
afterAll(async () => {
  await broker?.end('SIGTERM')
  await db?.drop()
})

const count = async (sensorId: number) =>
  (
    await rows<{ count: number }>(
      db.database,
      'SELECT count(*)::int AS count FROM readings WHERE sensor_id = $1',
      [sensorId],
    )
  )[0]!.count

describe('a sensor that sends too much', () => {
  it('waits while others do not; none of its readings is lost, and the reason is kept', async () => {
    const noisy = await site.addSensor('noisy')
    const calm = await site.addSensor('calm')
    const loud = await connectSensor(broker.port, noisy)
    const quiet = await connectSensor(broker.port, calm)
    const startMs = Date.now() - 600_000
    const list = (first: number, length: number) =>
      Array.from({ length }, (_, index) => ({ t: startMs + first + index, co2_ppm: 500 }))
    // the burst is a minute of the rate: 1200 readings; 40 more take 2 s
    for (const first of [0, 400, 800]) await publish(loud, noisy.topic, list(first, 400))
    const order: string[] = []
    const late = list(1200, 40).map((reading) => publish(loud, noisy.topic, reading))
    const last = Promise.all(late).then(() => order.push('noisy'))
    await publish(quiet, calm.topic, { co2_ppm: 500 })
    order.push('calm')
    await last
    expect(order).toEqual(['calm', 'noisy'])
    expect(await count(noisy.id)).toBe(1240)
    const refused = () =>
      rows<{ reason: string }>(db.database, 'SELECT reason FROM refused_messages WHERE sensor_id = $1', [
        noisy.id,
      ])
    expect(await eventually(refused, (found) => found.length > 0)).toEqual([{ reason: 'throttled' }])
    await Promise.all([loud.endAsync(), quiet.endAsync()])
  })
  it('and goes away while it waits leaves nothing behind that hurts', async () => {
    const noisy = await site.addSensor('noisy-2')
    const loud = await connectSensor(broker.port, noisy)
    const startMs = Date.now() - 600_000
    for (const first of [0, 400, 800])
      await publish(
        loud,
        noisy.topic,
        Array.from({ length: 400 }, (_, index) => ({ t: startMs + first + index, co2_ppm: 500 })),
      )
    for (let index = 0; index < 200; index++)
      loud.publish(noisy.topic, JSON.stringify({ t: startMs + 1200 + index, co2_ppm: 500 }), { qos: 1 })
    await new Promise((resolve) => setTimeout(resolve, 100))
    loud.end(true)
    const calm = await connectSensor(broker.port, await site.addSensor('calm-2'))
    await calm.endAsync()
    expect(await count(noisy.id)).toBeGreaterThanOrEqual(1200)
  })
})

describe('connections', () => {
  it('that never say who they are do not keep others out', async () => {
    const silent = await Promise.all(
      Array.from(
        { length: 300 },
        () =>
          new Promise<net.Socket>((resolve) => {
            const socket = net.connect(broker.port, '127.0.0.1', () => resolve(socket))
            socket.on('error', () => undefined)
            socket.write(Buffer.from([0x10])) // the first byte of a CONNECT, then nothing
          }),
      ),
    )
    const s = await site.addSensor('patient')
    const client = await connectSensor(broker.port, s)
    await publish(client, s.topic, { co2_ppm: 500 })
    await client.endAsync()
    const closed = Promise.all(
      silent.map((socket) => new Promise((resolve) => socket.once('close', resolve))),
    )
    for (const socket of silent) socket.resume()
    await closed // by the broker, after its time for a CONNECT
    expect(await count(s.id)).toBe(1)
  })
  it('of the same device: the newer one takes over', async () => {
    const s = await site.addSensor('twice')
    const first = await connectSensor(broker.port, s)
    const closed = new Promise<void>((resolve) => first.once('close', () => resolve()))
    const second = await connectSensor(broker.port, s)
    await closed
    await publish(second, s.topic, { co2_ppm: 500 })
    await second.endAsync()
    expect(await count(s.id)).toBe(1)
  })
})

describe('a broker without its database', () => {
  it('starts, answers connects with 3 (come again), and says why', async () => {
    const s = await site.addSensor('early')
    const nowhere = await startBroker({ appUrl: `postgres://ebbmark_app@127.0.0.1:${await freePort()}/none` })
    expect(await refusedWith(connectSensor(nowhere.port, s))).toBe(3)
    expect(nowhere.output()).toContain('ECONNREFUSED')
    expect(await nowhere.end('SIGTERM')).toBe(0)
  })
  it('or on a port that is taken ends with a message that says what to do', async () => {
    await expect(startBroker({ appUrl: db.appUrl, port: broker.port })).rejects.toThrow(
      /is taken: stop what uses it, or set MQTT_PORT/,
    )
  })
})

describe('a reading that PostgreSQL itself refuses', () => {
  it('is recorded alone, and the rest of its batch is stored', async () => {
    const gone = await site.addSensor('gone')
    const kept = await site.addSensor('kept')
    const [a, b] = await Promise.all([connectSensor(broker.port, gone), connectSensor(broker.port, kept)])
    // a sensor deleted behind the broker's back: its latest reading breaks the reference
    await rows(db.database, 'DELETE FROM sensors WHERE id = $1', [gone.id])
    await Promise.all([
      ...Array.from({ length: 20 }, (_, index) =>
        publish(b, kept.topic, { t: Date.now() - index * 1000, co2_ppm: 500 }),
      ),
      publish(a, gone.topic, { co2_ppm: 500 }),
    ])
    expect(await count(kept.id)).toBe(20)
    expect(await count(gone.id)).toBe(0)
    const refused = await rows<{ reason: string }>(
      db.database,
      'SELECT reason FROM refused_messages WHERE sensor_id = $1',
      [gone.id],
    )
    expect(refused).toEqual([{ reason: 'cannot-be-stored' }])
    await Promise.all([a.endAsync(), b.endAsync()])
  })
})

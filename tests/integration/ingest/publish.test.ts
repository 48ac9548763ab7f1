import type { MqttClient } from 'mqtt'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import {
  type BrokerProcess,
  connectSensor,
  eventually,
  makeSite,
  publish,
  rows,
  startBroker,
  type TestSensor,
  type TestSite,
} from '@/tests/support/broker'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'

let db: TestDatabase
let broker: BrokerProcess
let site: TestSite
let count = 0

beforeAll(async () => {
  db = await createTestDatabase()
  site = await makeSite(db.database, 'tannery')
  broker = await startBroker({ appUrl: db.appUrl })
})
afterAll(async () => {
  await broker?.end('SIGTERM')
  await db?.drop()
})

/** A sensor of its own for each test, connected. */
async function sensor(): Promise<
  TestSensor & { client: MqttClient; send: (payload: unknown) => Promise<void> }
> {
  const added = await site.addSensor(`Pub-${++count}`)
  const client = await connectSensor(broker.port, added)
  return { ...added, client, send: (payload) => publish(client, added.topic, payload) }
}

type Stored = { at: Date; co2_ppm: number; temp_c: number | null; marked: number }
const stored = (id: number) =>
  rows<Stored>(
    db.database,
    'SELECT at, co2_ppm, temp_c, marked FROM readings WHERE sensor_id = $1 ORDER BY at',
    [id],
  )
type Refused = { reason: string; count: number; detail: string; sample: string | null; source: string }
const refused = (id: number) =>
  rows<Refused>(
    db.database,
    'SELECT reason, count, detail, sample, source FROM refused_messages WHERE sensor_id = $1 ORDER BY reason',
    [id],
  )
const latest = async (id: number) =>
  (
    await rows<Stored & { battery_pct: number | null }>(
      db.database,
      'SELECT * FROM latest_readings WHERE sensor_id = $1',
      [id],
    )
  )[0]

const minute = Math.floor(Date.now() / 60_000) * 60_000
const iso = (minutesAgo: number) => new Date(minute - minutesAgo * 60_000).toISOString()

describe('readings', () => {
  it('are in the table, with the newest in latest_readings, when the acknowledgement arrives', async () => {
    const s = await sensor()
    await s.send({ t: iso(2), co2_ppm: 812.5, temp_c: 21.5, rh_pct: 38, battery_pct: 91, rssi_dbm: -67 })
    expect(await stored(s.id)).toEqual([{ at: new Date(iso(2)), co2_ppm: 812.5, temp_c: 21.5, marked: 0 }])
    expect(await latest(s.id)).toMatchObject({
      at: new Date(iso(2)),
      co2_ppm: 812.5,
      battery_pct: 91,
      rssi_dbm: -67,
    })
    expect(await refused(s.id)).toEqual([])
  })
  it('sent twice are stored once, and nothing is refused', async () => {
    const s = await sensor()
    const reading = { t: iso(1), co2_ppm: 640.3, temp_c: 20.1 }
    for (let times = 0; times < 3; times++) await s.send(reading)
    await s.send([reading, reading])
    expect(await stored(s.id)).toHaveLength(1)
    expect(await refused(s.id)).toEqual([])
  })
  it('of another value for the same instant are refused, and the first stays', async () => {
    const s = await sensor()
    await s.send({ t: iso(1), co2_ppm: 640 })
    await s.send({ t: iso(1), co2_ppm: 641 })
    await s.send([
      { t: iso(0), co2_ppm: 700 },
      { t: iso(0), co2_ppm: 701 },
    ])
    expect((await stored(s.id)).map((row) => row.co2_ppm)).toEqual([640, 700])
    expect(await refused(s.id)).toMatchObject([{ reason: 'conflicts-with-stored', count: 2 }])
    expect((await latest(s.id))?.co2_ppm).toBe(700)
  })
  it('out of order are all stored, and the newest in time is the latest', async () => {
    const s = await sensor()
    for (const minutesAgo of [5, 1, 9, 3]) await s.send({ t: iso(minutesAgo), co2_ppm: 500 + minutesAgo })
    expect((await stored(s.id)).map((row) => row.co2_ppm)).toEqual([509, 505, 503, 501])
    expect((await latest(s.id))?.co2_ppm).toBe(501)
  })
  it('in a list are taken item by item', async () => {
    const s = await sensor()
    await s.send([
      { t: iso(2), co2_ppm: 600 },
      { t: iso(1), co2_ppm: -3 },
      { t: iso(0), co2_ppm: 602, temp_c: 400 },
    ])
    expect(await stored(s.id)).toMatchObject([{ co2_ppm: 600 }, { co2_ppm: 602, temp_c: null }])
    const [refusal] = await refused(s.id)
    expect(refusal).toMatchObject({ reason: 'implausible-value', count: 2, source: s.deviceId })
    expect(refusal?.detail).toContain('item 2: co2_ppm = -3')
  })
  it('in a list of 500 over months that have no partition yet are stored', async () => {
    const s = await sensor()
    const day = 86_400_000
    const list = Array.from({ length: 500 }, (_, index) => ({
      t: minute - Math.floor(index * 0.79 * day),
      co2_ppm: 450,
    }))
    await s.send(list)
    expect(await stored(s.id)).toHaveLength(500)
  })
  it('as SenML are stored', async () => {
    const s = await sensor()
    await s.send([
      { bn: 'urn:dev:mac:0024befffe804ff1:', bt: minute / 1000 - 60, n: 'co2', u: 'ppm', v: 733 },
      { n: 'temp', u: 'Cel', v: 19.5 },
    ])
    expect(await stored(s.id)).toMatchObject([{ at: new Date(iso(1)), co2_ppm: 733, temp_c: 19.5 }])
  })
  it('outside 350 to 5000 ppm are stored and marked', async () => {
    const s = await sensor()
    await s.send([
      { t: iso(2), co2_ppm: 12 },
      { t: iso(1), co2_ppm: 400 },
      { t: iso(0), co2_ppm: 9000 },
    ])
    expect((await stored(s.id)).map((row) => row.marked)).toEqual([1, 0, 1])
  })
  it('without a time take the time of arrival to the second', async () => {
    const s = await sensor()
    const before = Math.floor(Date.now() / 1000) * 1000
    await s.send({ co2_ppm: 555 })
    const [row] = await stored(s.id)
    expect(row?.at.getMilliseconds()).toBe(0)
    expect(row?.at.getTime()).toBeGreaterThanOrEqual(before)
    expect(row?.at.getTime()).toBeLessThanOrEqual(Date.now())
  })
  it('that are late mark their hour once; a redelivery does not mark it again', async () => {
    const s = await sensor()
    const marks = () =>
      rows<{ hour: Date; received_at: Date }>(
        db.database,
        'SELECT hour, received_at FROM late_readings WHERE hour = $1',
        [hour],
      )
    const at = minute - 50 * 86_400_000
    const hour = new Date(Math.floor(at / 3_600_000) * 3_600_000)
    await s.send({ t: at, co2_ppm: 500 })
    const first = await marks()
    expect(first).toHaveLength(1)
    await s.send({ t: at, co2_ppm: 500 })
    expect(await marks()).toEqual(first)
  })
  it('of QoS 0 and QoS 2 are stored too, and a retained one is not kept by the broker', async () => {
    const s = await sensor()
    await publish(s.client, s.topic, { t: iso(2), co2_ppm: 501 }, { qos: 2 })
    await publish(s.client, s.topic, { t: iso(1), co2_ppm: 502 }, { qos: 0, retain: true })
    await s.send({ t: iso(0), co2_ppm: 503 })
    expect((await stored(s.id)).map((row) => row.co2_ppm)).toEqual([501, 502, 503])
  })
})

describe('bad messages', () => {
  it('are kept with their reason and acknowledged, and the connection stays', async () => {
    const s = await sensor()
    let closed = 0
    s.client.on('close', () => closed++)
    await s.send('not json')
    await s.send(Buffer.from([0, 255, 254, 3]))
    await s.send('')
    await s.send({ co2_ppm: 800, t: Date.now() + 700_000 })
    await s.send({ co2_ppm: 800, t: Date.now() - 401 * 86_400_000 })
    await s.send({ co2_ppm: 60_000 })
    await s.send({ temp_c: 21 })
    await s.send(Array.from({ length: 501 }, () => ({ co2_ppm: 500 })))
    await s.send(`{"co2_ppm":${'['.repeat(50_000)}${']'.repeat(50_000)}}`)
    await s.send(`{"co2_ppm":500,"note":"${'x'.repeat(1_048_576)}"}`)
    await publish(s.client, `ebbmark/v1/${s.site}/other/readings`, { co2_ppm: 500 })
    await publish(s.client, `ebbmark/v1/other-site/${s.deviceId}/readings`, { co2_ppm: 500 })
    await publish(s.client, '$SYS/x', 'x')
    await publish(s.client, `${'a/'.repeat(200)}a`, 'x')
    const found = await refused(s.id)
    expect(Object.fromEntries(found.map((row) => [row.reason, row.count]))).toEqual({
      'bad-json': 3,
      'time-in-future': 1,
      'time-too-old': 1,
      'implausible-value': 1,
      'missing-co2': 1,
      'too-many-items': 1,
      'wrong-type': 1,
      'too-large': 1,
      'wrong-topic': 4,
    })
    for (const row of found) expect(Buffer.byteLength(row.sample ?? '')).toBeLessThanOrEqual(2048)
    expect(found.find((row) => row.reason === 'bad-json')?.sample).toBe('not json')
    expect(await stored(s.id)).toEqual([])
    await s.send({ t: iso(0), co2_ppm: 500 })
    expect(await stored(s.id)).toHaveLength(1)
    expect(closed).toBe(0)
  })
  it('with a zero character or half a sign in them are kept as far as text can', async () => {
    const s = await sensor()
    await s.send('{"co2_ppm":"\\u0000\\ud800"}')
    await s.send(Buffer.concat([Buffer.from('{"co2_ppm":'), Buffer.alloc(5)]))
    expect((await refused(s.id)).map((row) => row.reason)).toEqual(['bad-json', 'wrong-type'])
  })
  it('of one device do not keep another waiting', async () => {
    const noisy = await sensor()
    const calm = await sensor()
    const flood = Promise.all(Array.from({ length: 1000 }, () => noisy.send('{')))
    await calm.send({ t: iso(0), co2_ppm: 500 })
    await flood
    expect(await refused(noisy.id)).toMatchObject([{ reason: 'bad-json', count: 1000 }])
    expect(await stored(calm.id)).toHaveLength(1)
  })
})

describe('a sensor', () => {
  it('cannot subscribe, not even to its own topic', async () => {
    const s = await sensor()
    const granted = await s.client.subscribeAsync(s.topic, { qos: 1 }).then(
      (grants) => grants.map((grant) => grant.qos),
      (error: Error) => error.message,
    )
    expect(granted).not.toEqual([1])
    let heard = 0
    s.client.on('message', () => heard++)
    await s.send({ t: iso(0), co2_ppm: 500 })
    const found = await eventually(
      () => refused(s.id),
      (list) => list.length > 0,
    )
    expect(found).toMatchObject([{ reason: 'subscribe-refused' }])
    expect(heard).toBe(0)
  })
  it('may publish its status, which stores nothing', async () => {
    const s = await sensor()
    const topic = s.topic.replace('/readings', '/status')
    await publish(s.client, topic, 'online', { retain: true })
    await publish(s.client, topic, 'asleep', { retain: true })
    expect(await refused(s.id)).toMatchObject([{ reason: 'bad-payload', count: 1 }])
    expect(await stored(s.id)).toEqual([])
  })
})

import net from 'node:net'
import pg from 'pg'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { deviceSecretSha256, newDeviceSecret } from '@/db/device-secret'
import { LIVE_CHANNEL, liveNotice } from '@/lib/wire/live'
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
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'

let db: TestDatabase
let broker: BrokerProcess
let site: TestSite
let count = 0
const sensor = () => site.addSensor(`Con-${++count}`)

beforeAll(async () => {
  db = await createTestDatabase()
  site = await makeSite(db.database, 'foundry')
  broker = await startBroker({ appUrl: db.appUrl })
})
afterAll(async () => {
  await broker?.end('SIGTERM')
  await db?.drop()
})

type Refused = {
  source: string
  reason: string
  count: number
  organization_id: number | null
  detail: string
}
const refusedBy = (reason: string, part: string) =>
  eventually(
    () =>
      rows<Refused>(
        db.database,
        'SELECT * FROM refused_messages WHERE reason = $1 AND (detail LIKE $2 OR source LIKE $2)',
        [reason, `%${part}%`],
      ),
    (list) => list.length > 0,
  )
const notifySensors = () =>
  rows(db.database, 'SELECT pg_notify($1, $2)', [
    LIVE_CHANNEL,
    JSON.stringify(liveNotice('sensors', [site.buildingId])),
  ])

describe('a connect', () => {
  it('with the right secret is taken, the name without case', async () => {
    const s = await sensor()
    const name = s.deviceId.toUpperCase()
    const client = await connectSensor(broker.port, { ...s, deviceId: name })
    await publish(client, s.topic.replace(s.deviceId, name), { co2_ppm: 500 })
    await client.endAsync()
    expect(await rows(db.database, 'SELECT FROM readings WHERE sensor_id = $1', [s.id])).toHaveLength(1)
  })
  it('with a wrong secret, or none, is refused with 4 and recorded under the sensor', async () => {
    const s = await sensor()
    expect(await refusedWith(connectSensor(broker.port, { ...s, secret: newDeviceSecret() }))).toBe(4)
    expect(await refusedWith(connectSensor(broker.port, s, { password: undefined }))).toBe(4)
    const [row] = await refusedBy('wrong-secret', s.deviceId)
    expect(row).toMatchObject({ source: s.deviceId, count: 2, organization_id: site.organizationId })
    expect(row?.detail).not.toContain(s.secret)
  })
  it('of an unknown name is refused with 4 and recorded under the address', async () => {
    expect(await refusedWith(connectSensor(broker.port, { deviceId: 'nobody-1', secret: 'x' }))).toBe(4)
    expect(await refusedWith(connectSensor(broker.port, { deviceId: "x' OR 1=1", secret: 'x' }))).toBe(4)
    expect(await refusedBy('unknown-device', '127.0.0.1')).toMatchObject([
      { source: 'address 127.0.0.1', organization_id: null },
    ])
  })
  it('with another client id is refused with 2 and recorded', async () => {
    const s = await sensor()
    expect(await refusedWith(connectSensor(broker.port, s, { clientId: 'something-else' }))).toBe(2)
    expect(await refusedBy('other-client-id', s.deviceId)).toHaveLength(1)
  })
  it('of a retired sensor is refused, and an open connection of one ends on the notice', async () => {
    const s = await sensor()
    const client = await connectSensor(broker.port, s)
    const closed = new Promise<void>((resolve) => client.once('close', () => resolve()))
    await rows(db.database, 'UPDATE sensors SET retired_at = now() WHERE id = $1', [s.id])
    await notifySensors()
    await closed
    expect(await refusedWith(connectSensor(broker.port, s))).toBe(5)
    expect(await refusedBy('retired-device', s.deviceId)).toHaveLength(1)
  })
  it('with a new secret works at once after the notice, with the old one no more', async () => {
    const s = await sensor()
    const client = await connectSensor(broker.port, s)
    await client.endAsync()
    const secret = newDeviceSecret()
    await rows(db.database, 'UPDATE sensors SET secret_sha256 = $2 WHERE id = $1', [
      s.id,
      deviceSecretSha256(secret),
    ])
    await notifySensors()
    const isNew = async () => refusedWith(connectSensor(broker.port, { ...s, secret }))
    expect(await eventually(isNew, (answer) => answer === 'connected')).toBe('connected')
    expect(await refusedWith(connectSensor(broker.port, s))).toBe(4)
  })
  it('that fails again and again is refused unread, and another sensor is not touched', async () => {
    const s = await sensor()
    const tries = Array.from({ length: 10 }, () =>
      refusedWith(connectSensor(broker.port, { ...s, secret: 'wrong' })),
    )
    expect(new Set(await Promise.all(tries))).toEqual(new Set([4]))
    expect(await refusedWith(connectSensor(broker.port, s))).toBe(5)
    expect(await refusedBy('too-many-failed-connects', s.deviceId)).toHaveLength(1)
    const other = await connectSensor(broker.port, await sensor())
    await other.endAsync()
  })
  it('of MQTT 5 is refused with a CONNACK that says so', async () => {
    const s = await sensor()
    const answer = await exchange([connectPacket(s.deviceId, s.secret, 5)], 4)
    expect([...answer]).toEqual([0x20, 2, 0, 1])
    expect(await refusedBy('unsupported-protocol', 'protocol version 5')).toHaveLength(1)
  })
  it('is one of a thousand at once, and all are answered', async () => {
    const sensors = await Promise.all(Array.from({ length: 50 }, sensor))
    const good = sensors.map((s) => refusedWith(connectSensor(broker.port, s, { connectTimeout: 30_000 })))
    const bad = Array.from({ length: 950 }, (_, index) =>
      refusedWith(
        connectSensor(broker.port, { deviceId: `crowd-${index}`, secret: 'x' }, { connectTimeout: 30_000 }),
      ),
    )
    expect(new Set(await Promise.all(good))).toEqual(new Set(['connected']))
    expect(new Set(await Promise.all(bad))).toEqual(new Set([4]))
  })
})

describe('bytes on the wire', () => {
  it('that are no MQTT end that connection alone and are recorded', async () => {
    const s = await sensor()
    const client = await connectSensor(broker.port, s)
    await exchange([Buffer.from('GET / HTTP/1.1\r\nHost: x\r\n\r\n')], 1)
    await exchange([Buffer.alloc(5000, 0xff)], 1)
    expect(await refusedBy('protocol-error', '127.0.0.1')).not.toHaveLength(0)
    await publish(client, s.topic, { co2_ppm: 500 })
    await client.endAsync()
  })
  it('that publish to wildcards or to nothing are refused, acknowledged, and the connection stays', async () => {
    const s = await sensor()
    const topics = ['ebbmark/v1/+/x/readings', '#', '', 'a/#/b', s.topic]
    const packets = topics.map((topic, index) => publishPacket(topic, '{"co2_ppm":501}', index + 1))
    const answer = await exchange([connectPacket(s.deviceId, s.secret, 4), ...packets], 4 + 4 * topics.length)
    const acks = topics.flatMap((_, index) => [0x40, 2, 0, index + 1])
    expect([...answer]).toEqual([0x20, 2, 0, 0, ...acks])
    expect(await refusedBy('wrong-topic', s.deviceId)).toMatchObject([{ count: 4 }])
    expect(await rows(db.database, 'SELECT FROM readings WHERE sensor_id = $1', [s.id])).toHaveLength(1)
  })
  it('that announce a packet of 200 MB end the connection before it is taken in', async () => {
    const s = await sensor()
    const answer = await exchange(
      [
        connectPacket(s.deviceId, s.secret, 4),
        Buffer.from([0x32, 0x80, 0x80, 0x80, 0x64]),
        Buffer.alloc(100_000),
      ],
      1000,
    )
    expect([...answer]).toEqual([0x20, 2, 0, 0])
    expect(await refusedBy('too-large', s.deviceId)).toMatchObject([{ count: 1 }])
  })
})

describe('an air handler’s gateway', () => {
  it('publishes supply states under its own credential, and nothing else', async () => {
    const secret = newDeviceSecret()
    const [handler] = await rows<{ id: number }>(
      db.database,
      `INSERT INTO air_handlers (organization_id, building_id, code, name, secret_sha256) VALUES ($1, $2, 'AHU-2', 'North', $3) RETURNING id`,
      [site.organizationId, site.buildingId, deviceSecretSha256(secret)],
    )
    const client = await connectSensor(broker.port, { deviceId: 'foundry/AHU-2', secret })
    const at = new Date(Math.floor(Date.now() / 1000) * 1000)
    const state = { t: at.toISOString(), state: 'reduced', outdoor_fraction: 0.4, supply_lps: 800 }
    const topic = 'ebbmark/v1/foundry/AHU-2/supply'
    await publish(client, topic, state)
    await publish(client, topic, state)
    await publish(client, topic, { ...state, state: 'off' })
    await publish(client, 'ebbmark/v1/foundry/AHU-2/readings', { co2_ppm: 500 })
    await client.endAsync()
    expect(
      await rows(db.database, 'SELECT * FROM supply_states WHERE air_handler_id = $1', [handler!.id]),
    ).toMatchObject([
      { at, state: 'reduced', outdoor_fraction: 0.4, supply_lps: 800, building_id: site.buildingId },
    ])
    const refused = await rows<Refused>(
      db.database,
      `SELECT * FROM refused_messages WHERE source = 'foundry/AHU-2' ORDER BY reason`,
    )
    expect(refused.map((row) => [row.reason, row.count])).toEqual([
      ['conflicts-with-stored', 1],
      ['wrong-topic', 1],
    ])
  })
})

describe('live notices and heartbeat', () => {
  it('name the building after a commit, at most four a second', async () => {
    const s = await sensor()
    const client = await connectSensor(broker.port, s)
    const listener = new pg.Client({ connectionString: db.appUrl })
    await listener.connect()
    const heard: string[] = []
    listener.on('notification', (message) => heard.push(message.payload ?? ''))
    await listener.query(`LISTEN ${LIVE_CHANNEL}`)
    const startMs = Date.now()
    for (let sent = 0; sent < 40; sent++) {
      await publish(client, s.topic, { t: startMs - sent * 1000, co2_ppm: 500 })
      await new Promise((resolve) => setTimeout(resolve, 25))
    }
    const seconds = (Date.now() - startMs) / 1000
    await eventually(
      async () => heard.length,
      (length) => length > 1,
    )
    await listener.end()
    await client.endAsync()
    expect(new Set(heard)).toEqual(new Set([JSON.stringify(liveNotice('readings', [site.buildingId]))]))
    expect(heard.length).toBeGreaterThan(1)
    expect(heard.length).toBeLessThanOrEqual(Math.ceil(seconds * 4) + 1)
  })
  it('say that the broker lives', async () => {
    const beats = await rows<{ kind: string; info: Record<string, unknown> }>(
      db.database,
      'SELECT * FROM worker_heartbeats',
    )
    expect(beats).toMatchObject([{ kind: 'broker', info: { storeAway: false, port: broker.port } }])
  })
})

describe('a stop', () => {
  it('commits and acknowledges what is in hand, and clears the heartbeat', async () => {
    const own = await startBroker({ appUrl: db.appUrl })
    const s = await sensor()
    const client = await connectSensor(own.port, s)
    let acknowledged = 0
    const sent = Array.from({ length: 300 }, (_, index) =>
      publish(client, s.topic, { t: Date.now() - index * 1000, co2_ppm: 500 }).then(
        () => acknowledged++,
        () => undefined,
      ),
    )
    await sent[0]
    expect(await own.end('SIGTERM')).toBe(0)
    client.end(true)
    const stored = await rows(db.database, 'SELECT FROM readings WHERE sensor_id = $1', [s.id])
    expect(acknowledged).toBeGreaterThan(0)
    expect(stored.length).toBeGreaterThanOrEqual(acknowledged)
    expect(
      await rows(db.database, 'SELECT FROM worker_heartbeats WHERE info @> $1', [
        JSON.stringify({ port: own.port }),
      ]),
    ).toEqual([])
  })
  it('of the parent ends the broker', async () => {
    const own = await startBroker({ appUrl: db.appUrl })
    own.disconnect()
    expect(await own.ended).toBe(0)
  })
})

function text(value: string): Buffer {
  const bytes = Buffer.from(value)
  return Buffer.concat([Buffer.from([bytes.length >> 8, bytes.length & 255]), bytes])
}

function packet(first: number, body: Buffer): Buffer {
  const length: number[] = []
  let left = body.length
  do {
    length.push(left >= 128 ? (left % 128) | 128 : left)
    left = Math.floor(left / 128)
  } while (left > 0)
  return Buffer.concat([Buffer.from([first, ...length]), body])
}

function connectPacket(name: string, secret: string, version: 4 | 5): Buffer {
  const head = Buffer.concat([
    text('MQTT'),
    Buffer.from([version, 0xc2, 0, 60]),
    ...(version === 5 ? [Buffer.from([0])] : []),
  ])
  return packet(0x10, Buffer.concat([head, text(name), text(name), text(secret)]))
}

function publishPacket(topic: string, payload: string, id: number): Buffer {
  return packet(0x32, Buffer.concat([text(topic), Buffer.from([id >> 8, id & 255]), Buffer.from(payload)]))
}

/** Sends packets, the later ones after the first answer; gives what came back until enough came or the connection ended. */
function exchange(packets: Buffer[], enough: number): Promise<Buffer> {
  const [first, ...later] = packets
  return new Promise((resolve) => {
    const socket = net.connect(broker.port, '127.0.0.1', () => socket.write(first!))
    let answer = Buffer.alloc(0)
    socket.setTimeout(8000, () => socket.destroy())
    socket.on('data', (bytes) => {
      if (answer.length === 0) for (const next of later) socket.write(next)
      answer = Buffer.concat([answer, bytes])
      if (answer.length >= enough) socket.destroy()
    })
    socket.on('error', () => undefined)
    socket.on('close', () => resolve(answer))
  })
}

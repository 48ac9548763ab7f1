import { randomBytes } from 'node:crypto'
import fs from 'node:fs'
import net from 'node:net'
import { Aedes } from 'aedes'
import mqtt, { type IClientOptions, type MqttClient } from 'mqtt'
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest'
import { addFeed, removeFeed, switchFeed } from '@/db/changes/feeds'
import { newPublicId } from '@/db/public-id'
import { getFeed, listFeeds } from '@/db/queries/feeds'
import { scopeOf } from '@/lib/policy/scope'
import type { FeedMapping } from '@/lib/wire/feed'
import { eventually, makeSite, publish, rows, type TestSite } from '@/tests/support/broker'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { type Mosquitto, startMosquitto } from '@/tests/support/mosquitto'
import { startIngestMain, type WorkerProcess } from '@/tests/support/worker'

const key = randomBytes(32).toString('hex')
const mapping: FeedMapping = {
  items: '/list',
  device: { pointer: '/dev' },
  time: { pointer: '/at', format: 'seconds' },
  co2: { pointer: '/gas/co2', unit: 'ppm', scale: 1 },
  temp: { pointer: '/gas/t', unit: '°C', scale: 0.1 },
  rh: null,
  battery: null,
  rssi: null,
}
const nowS = Math.floor(Date.now() / 1000)
const from = (dev: string, second: number, co2: unknown, t = 215) => ({
  dev,
  at: nowS - 3600 + second,
  gas: { co2, t },
})

let db: TestDatabase
let site: TestSite
let other: TestSite
let userId: number
let runner: WorkerProcess
const ends: (() => unknown)[] = []

beforeAll(async () => {
  db = await createTestDatabase()
  site = await makeSite(db.database, 'gasworks')
  other = await makeSite(db.database, 'other')
  const [user] = await rows<{ id: number }>(
    db.database,
    'INSERT INTO users (public_id, email, name) VALUES ($1, $2, $3) RETURNING id',
    [newPublicId(), 'admin@gasworks.example', 'Admin'],
  )
  userId = user!.id
  process.env.DATABASE_URL = db.appUrl
  process.env.EBBMARK_SECRET_KEY = key
  runner = await startRunner()
})
afterEach(async () => {
  for (const end of ends.splice(0).reverse()) await end()
})
afterAll(async () => {
  await runner?.end('SIGKILL')
  await (await import('@/lib/server/database')).database().close()
  await db?.drop()
})

const startRunner = () =>
  startIngestMain('ingest/feeds/main.ts', { DATABASE_URL: db.appUrl, EBBMARK_SECRET_KEY: key })

async function mosquitto(options: Parameters<typeof startMosquitto>[0] = {}): Promise<Mosquitto> {
  const broker = await startMosquitto(options)
  ends.push(broker.remove)
  return broker
}
async function connect(url: string, options: IClientOptions = {}): Promise<MqttClient> {
  const client = await mqtt.connectAsync(url, { reconnectPeriod: 0, ...options })
  ends.push(() => client.endAsync(true))
  return client
}

const actor = () => ({ organizationId: site.organizationId, userId })

async function makeFeed(given: {
  brokerUrl: string
  userName?: string
  password?: string
  caPem?: string
  topicFilter?: string
}): Promise<string> {
  const publicId = newPublicId()
  const { seal } = await import('@/lib/server/seal')
  const { sealPurpose } = await import('@/lib/server/feeds/address')
  const passwordSealed =
    given.password === undefined ? null : seal(given.password, sealPurpose(publicId), Buffer.from(key, 'hex'))
  await db.database.asSystem('test', (tx) =>
    addFeed(tx, actor(), {
      publicId,
      buildingId: site.buildingId,
      name: `feed ${publicId}`,
      brokerUrl: given.brokerUrl,
      userName: given.userName ?? null,
      passwordSealed,
      caPem: given.caPem ?? null,
      topicFilter: given.topicFilter ?? 'plant/+/up',
      mapping,
      now: new Date(),
    }),
  )
  return publicId
}
const turn = (publicId: string, enabled: boolean) =>
  db.database.asSystem('test', (tx) => switchFeed(tx, actor(), { publicId, enabled, now: new Date() }))

/** The feed as an administrator of its organisation sees it. */
const seen = (publicId: string) =>
  db.database.withScope(
    scopeOf({
      userId,
      organizationId: site.organizationId,
      roles: ['administrator'],
      buildingIds: null,
      tenancyId: null,
    }),
    (tx) => getFeed(tx, { publicId }),
  )
const connected = (publicId: string) =>
  eventually(
    () => seen(publicId),
    (feed) => feed?.row.connectedS !== null,
    15_000,
  )
const storedOf = (sensorId: number) =>
  rows<{ co2_ppm: number; temp_c: number }>(
    db.database,
    'SELECT co2_ppm, temp_c FROM readings WHERE sensor_id = $1 ORDER BY at',
    [sensorId],
  )

describe('a feed', () => {
  it('by TLS and password stores readings of the building’s sensors, lists the others, records what it refused', async () => {
    const broker = await mosquitto({ tls: true, passwords: { reader: 'lock gate', plant: 'p' } })
    const url = `mqtts://127.0.0.1:${broker.port}`
    const caPem = fs.readFileSync(broker.caFile, 'utf8')
    const sensor = await site.addSensor('Retort-1')
    await other.addSensor('elsewhere-9')
    const feed = await makeFeed({ brokerUrl: url, userName: 'reader', password: 'lock gate', caPem })
    const client = await connect(url, { username: 'plant', password: 'p', ca: caPem })
    await publish(client, 'plant/a/up', { list: [from('Retort-1', 0, 599)] })
    await turn(feed, true)
    expect((await connected(feed))?.row.connectedS).not.toBeNull()
    await publish(client, 'plant/a/up', {
      list: [
        from('retort-1', 1, 601),
        from('elsewhere-9', 1, 700),
        from('nobody', 1, 710),
        from('retort-1', 2, null),
      ],
    })
    await publish(client, 'plant/a/up', 'no JSON')
    await publish(client, 'plant/a/down', { list: [from('retort-1', 3, 800)] })
    const found = await eventually(
      () => seen(feed),
      (each) => each?.row.messages === 2,
      15_000,
    )
    expect(await storedOf(sensor.id)).toEqual([{ co2_ppm: 601, temp_c: 21.5 }])
    expect(found?.row).toMatchObject({
      enabled: true,
      messages: 2,
      readings: 1,
      refusals: 2,
      lastError: null,
    })
    // whose a sensor elsewhere is does not show: it is a candidate like any stranger
    expect(found?.candidates.map(({ deviceId, lastCo2Ppm }) => [deviceId, lastCo2Ppm]).sort()).toEqual([
      ['elsewhere-9', '700'],
      ['nobody', '710'],
    ])
    expect(found?.refusals.map(({ reason }) => reason).sort()).toEqual(['bad-json', 'missing-co2'])
    const kept = await rows<{ text: string }>(db.database, 'SELECT feeds::text AS text FROM feeds')
    expect(kept.map(({ text }) => text).join()).not.toContain('lock gate')
    expect(runner.output()).not.toContain('lock gate')
    await turn(feed, false)
    await eventually(
      () => seen(feed),
      (each) => each?.row.connectedS === null,
      15_000,
    )
    await publish(client, 'plant/a/up', { list: [from('retort-1', 4, 650)] })
    await new Promise((resolve) => setTimeout(resolve, 500))
    expect(await storedOf(sensor.id)).toHaveLength(1)
  })

  it('whose broker refuses it or is not there shows the reason', async () => {
    const broker = await mosquitto({ passwords: { reader: 'right' } })
    const feed = await makeFeed({
      brokerUrl: `mqtt://127.0.0.1:${broker.port}`,
      userName: 'reader',
      password: 'wrong',
    })
    await turn(feed, true)
    const refused = await eventually(
      () => seen(feed),
      (each) => each?.row.lastError !== null,
      15_000,
    )
    expect(refused?.row.lastError).toMatch(/does not (accept user name or password|authorise)/)
    await broker.end('SIGKILL')
    const away = await eventually(
      () => seen(feed),
      (each) => each?.row.lastError?.includes('ECONNREFUSED') === true,
      20_000,
    )
    expect(away?.row).toMatchObject({ connectedS: null, lastError: expect.stringContaining('ECONNREFUSED') })
    await turn(feed, false)
  })

  it('of a broker that speaks only MQTT 3.1.1 is read all the same', async () => {
    const aedes = await Aedes.createBroker()
    const server = net.createServer(aedes.handle)
    await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
    ends.push(() => new Promise<void>((resolve) => aedes.close(() => server.close(() => resolve()))))
    const { port } = server.address() as net.AddressInfo
    const sensor = await site.addSensor('Retort-2')
    const feed = await makeFeed({ brokerUrl: `mqtt://127.0.0.1:${port}` })
    await turn(feed, true)
    await connected(feed)
    const client = await connect(`mqtt://127.0.0.1:${port}`)
    await publish(client, 'plant/b/up', { list: [from('Retort-2', 0, 611)] })
    expect(
      await eventually(
        () => storedOf(sensor.id),
        (found) => found.length === 1,
      ),
    ).toEqual([{ co2_ppm: 611, temp_c: 21.5 }])
    // a version 5 broker is told what is too much; this one is left
    await publish(client, 'plant/b/up', Buffer.alloc(5 * 1024 * 1024, 32))
    const tooMuch = await eventually(
      () => seen(feed),
      (each) => each?.row.lastError?.includes('more than 4194304 bytes') === true,
      15_000,
    )
    expect(tooMuch?.row.lastError).toContain('more than 4194304 bytes')
    await turn(feed, false)
    await eventually(
      () => seen(feed),
      (each) => each?.row.connectedS === null,
      15_000,
    )
  })

  it('keeps its queue while the runner is away, and a killed runner’s feeds are taken over', async () => {
    const broker = await mosquitto()
    const url = `mqtt://127.0.0.1:${broker.port}`
    const sensor = await site.addSensor('Retort-3')
    const feed = await makeFeed({ brokerUrl: url })
    await turn(feed, true)
    await connected(feed)
    const client = await connect(url)
    await runner.end('SIGTERM')
    for (let second = 0; second < 200; second++)
      await publish(client, 'plant/c/up', { list: [from('Retort-3', second, 600 + second)] })
    expect(await storedOf(sensor.id)).toEqual([])
    runner = await startRunner()
    expect(
      await eventually(
        () => storedOf(sensor.id),
        (found) => found.length === 200,
        20_000,
      ),
    ).toHaveLength(200)
    await runner.end('SIGKILL')
    await rows(db.database, `UPDATE feeds SET leased_until = now() - interval '1 s' WHERE public_id = $1`, [
      feed,
    ])
    await publish(client, 'plant/c/up', { list: [from('Retort-3', 300, 900)] })
    runner = await startRunner()
    expect(
      await eventually(
        () => storedOf(sensor.id),
        (found) => found.length === 201,
        20_000,
      ),
    ).toHaveLength(201)
    await db.database.asSystem('test', (tx) =>
      removeFeed(tx, actor(), { publicId: feed, name: `feed ${feed}` }),
    )
    expect(await seen(feed)).toBeNull()
    expect(await storedOf(sensor.id)).toHaveLength(201)
  })

  it('is not seen by another organisation, nor by who is bound to a tenancy', async () => {
    const feed = await makeFeed({ brokerUrl: 'mqtt://127.0.0.1:1' })
    const membership = { userId, roles: ['administrator'] as const, buildingIds: null, tenancyId: null }
    const asOther = scopeOf({ ...membership, organizationId: other.organizationId })
    const asTenant = scopeOf({ ...membership, organizationId: site.organizationId, tenancyId: 1 })
    for (const scope of [asOther, asTenant]) {
      expect(await db.database.withScope(scope, (tx) => getFeed(tx, { publicId: feed }))).toBeNull()
      expect(await db.database.withScope(scope, listFeeds)).toEqual([])
    }
    const trail = await rows(db.database, 'SELECT action FROM audit_events WHERE subject_id = $1', [feed])
    expect(trail).toEqual([{ action: 'feed.added' }])
  })
})

describe('trying a feed', () => {
  const tried = async (brokerUrl: string, topicFilter = 'plant/+/up') => {
    const { tryFeed } = await import('@/lib/server/feeds/try')
    const { parseBrokerUrl } = await import('@/lib/server/mqtt/address')
    return tryFeed({ address: parseBrokerUrl(brokerUrl), topicFilter, mapping, buildingId: site.buildingId })
  }
  it('shows what comes and what would be stored, and stores nothing', async () => {
    const broker = await mosquitto()
    const url = `mqtt://127.0.0.1:${broker.port}`
    const sensor = await site.addSensor('Retort-4')
    const client = await connect(url)
    let second = 0
    const speaking = setInterval(
      () =>
        void publish(client, 'plant/d/up', {
          list: [from('Retort-4', second++, 640), from('nobody', 0, 650), from('Retort-4', 0, 'x')],
        }),
      50,
    )
    const trial = await tried(url)
    clearInterval(speaking)
    expect(trial).toMatchObject({ connected: true, problem: null })
    expect(trial.samples).toHaveLength(12)
    expect(trial.samples[0]).toMatchObject({
      topic: 'plant/d/up',
      readings: [
        { deviceId: 'Retort-4', becomes: 'stored', co2Ppm: 640, tempC: 21.5 },
        { deviceId: 'nobody', becomes: 'candidate', co2Ppm: 650 },
      ],
      refusals: [{ reason: 'wrong-type' }],
    })
    expect(await storedOf(sensor.id)).toEqual([])
  })
  it('says why there is nothing to show', async () => {
    const broker = await mosquitto({ passwords: { reader: 'right' } })
    expect(await tried(`mqtt://127.0.0.1:${broker.port}`)).toMatchObject({
      connected: false,
      problem: expect.stringMatching(/authorise|accept/),
      samples: [],
    })
    expect(await tried('mqtt://127.0.0.1:1')).toMatchObject({
      connected: false,
      problem: expect.stringContaining('ECONNREFUSED'),
    })
  })
})

import pg from 'pg'
import { afterAll, afterEach, beforeAll, expect, test } from 'vitest'
import { LIVE_CHANNEL } from '@/lib/wire/live'
import { type BoardChange, boardChangeSchema } from '@/lib/wire/live-board'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { makeSmallOrganization, type SmallOrganization } from '@/tests/support/small-building'

let db: TestDatabase
let mill: SmallOrganization
let owner: pg.Client
let hubModule: typeof import('@/lib/server/live/hub')
let streamModule: typeof import('@/lib/server/live/event-stream')
let visibleModule: typeof import('@/lib/server/live/visible')
let sessionModule: typeof import('@/lib/server/auth/session')
const aborts: AbortController[] = []

beforeAll(async () => {
  db = await createTestDatabase()
  mill = await makeSmallOrganization(db.database, 'mill')
  Object.assign(process.env, {
    DATABASE_URL: db.appUrl,
    NEXTAUTH_SECRET: 'a secret of the tests only, long enough to pass',
    LOG_LEVEL: 'silent',
  })
  hubModule = await import('@/lib/server/live/hub')
  streamModule = await import('@/lib/server/live/event-stream')
  visibleModule = await import('@/lib/server/live/visible')
  sessionModule = await import('@/lib/server/auth/session')
  owner = new pg.Client({ connectionString: db.ownerUrl })
  await owner.connect()
  await owner.query('SELECT ensure_readings_month(now())')
})

afterEach(() => {
  for (const abort of aborts.splice(0)) abort.abort()
})

afterAll(async () => {
  await hubModule?.liveHub().close()
  await owner?.end()
  const { database } = await import('@/lib/server/database')
  await database().close()
  await db?.drop()
})

/** A reading as ingest stores it: row, newest reading and notice in one transaction. */
async function publish(sensorId: number, co2Ppm: number, at = new Date()): Promise<void> {
  await db.database.asSystemRaw('test: a reading', async (client) => {
    await client.query(
      'INSERT INTO readings (sensor_id, at, co2_ppm) VALUES ($1, $2, $3) ON CONFLICT DO NOTHING',
      [sensorId, at, co2Ppm],
    )
    const notice = { v: 1, kind: 'readings', buildings: [mill.buildingId] }
    await client.query('SELECT pg_notify($1, $2)', [LIVE_CHANNEL, JSON.stringify(notice)])
  })
}

/** Someone signed in, as a session of the database says. */
async function signed(email: string) {
  const { rows } = await owner.query(
    `INSERT INTO sessions (user_id, user_version, expires_at) SELECT id, version, now() + interval '1 day' FROM users WHERE email = $1 RETURNING id`,
    [email],
  )
  const found = await sessionModule.readSession(rows[0].id)
  if (!found) throw new Error(`no session for ${email}`)
  return found
}

type Heard = { event: string; data: unknown }

/** Opens an event stream in this process and collects what it says. */
async function openStream(email: string, options: { wall?: boolean } = {}) {
  const abort = new AbortController()
  aborts.push(abort)
  const person = await signed(email)
  const response = streamModule.liveResponse({
    signed: person,
    buildingId: mill.buildingId,
    wall: options.wall ?? false,
    signal: abort.signal,
  })
  const heard: Heard[] = []
  const reader = response.body!.pipeThrough(new TextDecoderStream()).getReader()
  let ended = false
  void (async () => {
    let rest = ''
    for (;;) {
      const { done, value } = await reader.read()
      if (done) break
      rest += value
      const parts = rest.split('\n\n')
      rest = parts.pop() ?? ''
      for (const part of parts) {
        const event = /^event: (.*)$/m.exec(part)?.[1]
        const data = /^data: (.*)$/m.exec(part)?.[1]
        if (event) heard.push({ event, data: JSON.parse(data ?? 'null') })
      }
    }
    ended = true
  })()
  return {
    heard,
    abort,
    response,
    sessionId: person.sessionId,
    ended: () => ended,
    cancel: () => reader.cancel(),
  }
}

const rooms = (heard: readonly Heard[]) =>
  heard
    .filter(({ event }) => event === 'rooms')
    .map(({ data }) => boardChangeSchema.parse(data) as BoardChange)
const levels = (heard: readonly Heard[], id: string) =>
  rooms(heard).flatMap((change) =>
    change.rooms.filter((room) => room.id === id).map((room) => room.live?.co2Ppm ?? null),
  )

test('a committed reading reaches an open stream; the stream begins with the whole board and is neither compressed nor kept', async () => {
  const stream = await openStream(mill.people.operator)
  expect(stream.response.headers.get('content-type')).toContain('text/event-stream')
  expect(stream.response.headers.get('cache-control')).toContain('no-transform')
  await expect.poll(() => rooms(stream.heard)[0]?.rooms.length, { timeout: 10_000 }).toBe(4)
  await publish(mill.rooms.hall.sensorId, 777)
  await expect.poll(() => levels(stream.heard, mill.rooms.hall.publicId), { timeout: 10_000 }).toContain(777)
})

test('a tenant hears of the own rooms alone, and nothing live of a single-person room; a wall hides it from everyone', async () => {
  const tenant = await openStream(mill.people.tenant)
  const wall = await openStream(mill.people.operator, { wall: true })
  const operator = await openStream(mill.people.operator)
  const { hall, desk, spare } = mill.rooms
  await expect.poll(() => rooms(operator.heard).length, { timeout: 10_000 }).toBeGreaterThan(0)
  await expect.poll(() => rooms(wall.heard).length, { timeout: 10_000 }).toBeGreaterThan(0)
  await expect.poll(() => rooms(tenant.heard).length, { timeout: 10_000 }).toBeGreaterThan(0)
  for (const room of [desk, spare, hall]) await publish(room.sensorId, 888)
  await expect.poll(() => levels(operator.heard, hall.publicId), { timeout: 10_000 }).toContain(888)
  await expect.poll(() => levels(operator.heard, desk.publicId), { timeout: 10_000 }).toContain(888)
  await expect.poll(() => levels(tenant.heard, hall.publicId), { timeout: 10_000 }).toContain(888)
  const seen = new Set(rooms(tenant.heard).flatMap((change) => change.rooms.map(({ id }) => id)))
  expect(seen.has(spare.publicId)).toBe(false)
  for (const { heard } of [tenant, wall]) {
    expect(levels(heard, desk.publicId).every((level) => level === null)).toBe(true)
    expect(
      rooms(heard)
        .flatMap((change) => change.rooms)
        .find(({ id }) => id === desk.publicId)?.hidden,
    ).toBe(true)
  }
  const { scope } = await signed(mill.people.tenant)
  const board = await visibleModule.boardFor(scope, mill.buildingId)
  expect(board?.rooms.map(({ number }) => number)).toEqual(['0.01', '0.02', '0.03'])
})

test('a tenancy that has ended sees nothing live of its former room', async () => {
  const { scopeOf } = await import('@/lib/policy/scope')
  const member = {
    userId: 0,
    organizationId: mill.organizationId,
    roles: ['tenant'] as const,
    buildingIds: null,
  }
  const [former, present] = await Promise.all(
    [mill.tenancies.loom, mill.tenancies.weir].map(({ id }) =>
      visibleModule.boardFor(scopeOf({ ...member, tenancyId: id }), mill.buildingId),
    ),
  )
  expect(former?.rooms).toEqual([])
  expect(present?.rooms.map(({ name }) => name)).toContain('Studio')
})

test('when PostgreSQL ends the listening connection, it comes back, tells every stream to reload, and goes on', async () => {
  const stream = await openStream(mill.people.operator)
  await expect.poll(() => rooms(stream.heard).length, { timeout: 10_000 }).toBeGreaterThan(0)
  const super_ = new pg.Client({ connectionString: `${process.env.TEST_OWNER_URL}/postgres` })
  await super_.connect()
  const { rowCount } = await super_.query(
    `SELECT pg_terminate_backend(pid) FROM pg_stat_activity WHERE application_name = 'ebbmark live' AND datname = $1`,
    [db.name],
  )
  await super_.end()
  expect(rowCount).toBe(1)
  await expect
    .poll(() => stream.heard.some(({ event }) => event === 'reload'), { timeout: 15_000 })
    .toBe(true)
  await publish(mill.rooms.hall.sensorId, 999)
  await expect.poll(() => levels(stream.heard, mill.rooms.hall.publicId), { timeout: 10_000 }).toContain(999)
})

test('a session that ends closes its stream at the notice, with a word', async () => {
  const stream = await openStream(mill.people.operator)
  await expect.poll(() => rooms(stream.heard).length, { timeout: 10_000 }).toBeGreaterThan(0)
  await owner.query('UPDATE sessions SET revoked_at = now() WHERE id = $1', [stream.sessionId])
  await owner.query('SELECT pg_notify($1, $2)', [
    LIVE_CHANNEL,
    JSON.stringify({ v: 1, kind: 'session', buildings: 'many' }),
  ])
  await expect.poll(stream.ended, { timeout: 10_000 }).toBe(true)
  expect(stream.heard.at(-1)?.event).toBe('ended')
})

test('two hundred streams opened and dropped, by abort or by cancel, leave nothing behind', async () => {
  const { openStreamCount } = await import('@/lib/server/live/streams')
  const before = { subscribers: hubModule.liveHub().subscriberCount, streams: openStreamCount() }
  for (let round = 0; round < 20; round += 1) {
    const opened: Awaited<ReturnType<typeof openStream>>[] = []
    for (let i = 0; i < 10; i += 1) opened.push(await openStream(mill.people.engineer))
    expect(hubModule.liveHub().subscriberCount).toBe(before.subscribers + 10)
    for (const [i, stream] of opened.entries()) {
      if (i % 2 === 0) stream.abort.abort()
      else await stream.cancel()
    }
    await expect.poll(() => hubModule.liveHub().subscriberCount).toBe(before.subscribers)
  }
  expect(openStreamCount()).toBe(before.streams)
})

test('one person may not open streams without end', async () => {
  const opened = []
  for (let i = 0; i < streamModule.STREAMS_PER_PERSON; i += 1)
    opened.push(await openStream(mill.people.installer))
  await expect(openStream(mill.people.installer)).rejects.toMatchObject({ kind: 'too-many' })
  opened[0]?.abort.abort()
  expect((await openStream(mill.people.installer)).response.status).toBe(200)
})

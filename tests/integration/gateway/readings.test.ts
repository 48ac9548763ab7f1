import { execFile } from 'node:child_process'
import path from 'node:path'
import { promisify } from 'node:util'
import { NextRequest } from 'next/server'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { createApiKey, pruneApiAnswers, revokeApiKey } from '@/db/changes/api-keys'
import { KEY_RATE } from '@/lib/server/gateway/rate'
import type { GatewayAnswer } from '@/lib/wire/gateway'
import { makeSite, rows, type TestSensor, type TestSite } from '@/tests/support/broker'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'

let db: TestDatabase
let site: TestSite
let other: TestSite
let sensor: TestSensor
let post: (request: NextRequest) => Promise<Response>
const baseS = Math.floor(Date.now() / 1000) - 7200

beforeAll(async () => {
  db = await createTestDatabase()
  site = await makeSite(db.database, 'mill')
  other = await makeSite(db.database, 'other')
  sensor = await site.addSensor('Mill-1')
  process.env.DATABASE_URL = db.appUrl
  const handlers = await import('@/app/api/v1/readings/route')
  post = (request) => handlers.POST(request)
})
afterAll(async () => {
  await (await import('@/lib/server/database')).database().close()
  await db.drop()
})

/** A key of its own for each test, so that rates do not meet. */
async function newKey(
  buildingId: number | null = site.buildingId,
  scopes: readonly 'readings.write'[] = ['readings.write'],
): Promise<{ key: string; publicId: string }> {
  return db.database.asSystem('test', (tx) =>
    createApiKey(tx, {
      organizationId: site.organizationId,
      buildingId,
      userId: null,
      name: 'gateway',
      scopes,
      now: new Date(),
    }),
  )
}

function send(key: string | null, body: unknown, headers: Record<string, string> = {}): Promise<Response> {
  const authorization: Record<string, string> = key === null ? {} : { Authorization: `Bearer ${key}` }
  return post(
    new NextRequest('http://127.0.0.1/api/v1/readings', {
      method: 'POST',
      body: typeof body === 'string' ? body : JSON.stringify(body),
      headers: { 'Content-Type': 'application/json', ...authorization, ...headers },
    }),
  )
}
const answered = async (response: Response) => (await response.json()) as GatewayAnswer
const item = (second: number, co2: unknown, deviceId = 'mill-1') => ({
  device_id: deviceId,
  t: baseS + second,
  co2_ppm: co2,
})
const storedAt = (second: number) =>
  rows<{ co2_ppm: number; temp_c: number | null }>(
    db.database,
    'SELECT co2_ppm, temp_c FROM readings WHERE sensor_id = $1 AND at = to_timestamp($2)',
    [sensor.id, baseS + second],
  )

describe('POST /api/v1/readings', () => {
  it('answers each item: stored, duplicate, or refused with its reason', async () => {
    const { key, publicId } = await newKey()
    await other.addSensor('elsewhere-1')
    const response = await send(key, [
      { ...item(1, 612), temp_c: 21.5 },
      item(1, 612),
      item(1, 700),
      item(2, 'high'),
      item(3, 640, 'nobody'),
      item(3, 640, 'elsewhere-1'),
      { ...item(4, 650), rh_pct: 300 },
      'text',
      { ...item(5, 660), t: '2999-01-01T00:00:00Z' },
    ])
    expect(response.status).toBe(200)
    const answer = await answered(response)
    expect(answer).toMatchObject({ stored: 2, duplicate: 1, refused: 6 })
    expect(answer.results).toMatchObject([
      { status: 'stored' },
      { status: 'duplicate' },
      { status: 'refused', reason: 'conflicts-with-stored' },
      { status: 'refused', reason: 'wrong-type', detail: expect.stringContaining('co2_ppm = "high"') },
      { status: 'refused', reason: 'unknown-device' },
      { status: 'refused', reason: 'unknown-device' },
      { status: 'stored', note: expect.stringContaining('rh_pct = 300') },
      { status: 'refused', reason: 'bad-payload' },
      { status: 'refused', reason: 'time-in-future' },
    ])
    // whose another building's sensor is must not show: the same words as for one that does not exist
    expect(answer.results[4]).toEqual(answer.results[5])
    expect(await storedAt(1)).toEqual([{ co2_ppm: 612, temp_c: 21.5 }])
    const again = await answered(await send(key, [item(1, 612), item(1, 613)]))
    expect(again.results).toMatchObject([{ status: 'duplicate' }, { status: 'refused' }])
    const refused = await rows(
      db.database,
      `SELECT source, reason, count FROM refused_messages WHERE source IN ('Mill-1', $1) ORDER BY source = 'Mill-1', reason`,
      [`key ${publicId}`],
    )
    expect(refused).toEqual([
      { source: `key ${publicId}`, reason: 'bad-payload', count: 1 },
      { source: `key ${publicId}`, reason: 'unknown-device', count: 2 },
      { source: 'Mill-1', reason: 'conflicts-with-stored', count: 2 },
      { source: 'Mill-1', reason: 'implausible-value', count: 1 },
      { source: 'Mill-1', reason: 'time-in-future', count: 1 },
      { source: 'Mill-1', reason: 'wrong-type', count: 1 },
    ])
    const latest = await rows(db.database, 'SELECT co2_ppm FROM latest_readings WHERE sensor_id = $1', [
      sensor.id,
    ])
    expect(latest).toEqual([{ co2_ppm: 650 }])
  })

  it('makes the month of an old reading', async () => {
    const { key } = await newKey()
    const t = new Date(Date.now() - 300 * 86_400_000).toISOString()
    const answer = await answered(await send(key, [{ device_id: 'mill-1', t, co2_ppm: 500 }]))
    expect(answer.stored).toBe(1)
  })

  it('gives the same answer to the same Idempotency-Key, also to twenty at once, and refuses it for another body', async () => {
    const { key } = await newKey()
    const headers = { 'Idempotency-Key': 'batch-1' }
    const twenty = await Promise.all(
      Array.from({ length: 20 }, () => send(key, [item(100, 500), item(100, 501)], headers)),
    )
    const answers = await Promise.all(twenty.map(answered))
    expect(answers[0]).toMatchObject({ stored: 1, refused: 1 })
    for (const answer of answers) expect(answer).toEqual(answers[0])
    expect(twenty.filter((response) => response.headers.get('idempotency-replayed') === 'true')).toHaveLength(
      19,
    )
    const otherBody = await send(key, [item(101, 500)], headers)
    expect(otherBody.status).toBe(422)
    expect(await otherBody.json()).toMatchObject({ detail: expect.stringContaining('another body') })
    expect(await storedAt(101)).toEqual([])
    const { key: second } = await newKey()
    expect((await answered(await send(second, [item(101, 500)], headers))).stored).toBe(1)
  })

  it('forgets an Idempotency-Key after a day', async () => {
    const { key, publicId } = await newKey()
    const headers = { 'Idempotency-Key': 'batch-2' }
    await send(key, [item(200, 500)], headers)
    await rows(
      db.database,
      `UPDATE api_answers SET at = at - interval '25 h' WHERE api_key_id = (SELECT id FROM api_keys WHERE public_id = $1)`,
      [publicId],
    )
    const later = await send(key, [item(201, 500)], headers)
    expect(await later.json()).toMatchObject({ stored: 1 })
    await db.database.asSystem('test', (tx) => pruneApiAnswers(tx, { before: new Date(Date.now() + 1000) }))
    expect(await rows(db.database, 'SELECT FROM api_answers')).toEqual([])
  })

  it('lets in nobody without a key that stands, and no key beyond its scope or building', async () => {
    const { key, publicId } = await newKey()
    const attempts: [string | null, number][] = [
      [null, 401],
      ['ebb_short', 401],
      [`${key.slice(0, -1)}${key.endsWith('A') ? 'B' : 'A'}`, 401],
      [(await newKey(site.buildingId, [])).key, 403],
    ]
    for (const [given, status] of attempts) {
      const response = await send(given, [item(300, 500)])
      expect([given, response.status]).toEqual([given, status])
      expect(response.headers.get('content-type')).toBe('application/problem+json')
    }
    const elsewhere = await newKey(other.buildingId)
    expect((await answered(await send(elsewhere.key, [item(300, 500)]))).results).toMatchObject([
      { status: 'refused', reason: 'unknown-device' },
    ])
    expect(await storedAt(300)).toEqual([])
    const whole = await newKey(null)
    expect((await answered(await send(whole.key, [item(300, 500)]))).stored).toBe(1)
    const revoke = { publicId, organizationId: site.organizationId, userId: null, now: new Date() }
    expect(await db.database.asSystem('test', (tx) => revokeApiKey(tx, revoke))).toBe(true)
    expect((await send(key, [item(301, 500)])).status).toBe(401)
    const trail = await rows(
      db.database,
      'SELECT action FROM audit_events WHERE subject_id = $1 ORDER BY id',
      [publicId],
    )
    expect(trail).toEqual([{ action: 'api-key.created' }, { action: 'api-key.revoked' }])
  })

  it('refuses a body that is none: what it is and what was expected', async () => {
    const { key } = await newKey()
    const tooMany = Array.from({ length: 501 }, (_, index) => item(index, 500))
    const bodies: [unknown, number, RegExp][] = [
      ['{', 400, /not JSON/],
      [{ device_id: 'mill-1', co2_ppm: 500 }, 422, /list of readings/],
      [[], 422, /at least one/],
      [tooMany, 422, /at most 500/],
      [`[${' '.repeat(1024 * 1024)}]`, 413, /500 readings/],
    ]
    for (const [body, status, words] of bodies) {
      const response = await send(key, body)
      expect(response.status).toBe(status)
      expect(await response.text()).toMatch(words)
    }
    expect((await send(key, [item(400, 500)], { 'Idempotency-Key': 'with space' })).status).toBe(400)
  })

  it('holds a key to its rate and says when to come again', async () => {
    const { key } = await newKey()
    const statuses: number[] = []
    for (let index = 0; index < KEY_RATE.burst * 4; index++) {
      const response = await send(key, [item(500, 500)])
      statuses.push(response.status)
      if (response.status !== 429) continue
      expect(Number(response.headers.get('retry-after'))).toBeGreaterThanOrEqual(1)
      break
    }
    expect(statuses.slice(0, KEY_RATE.burst)).toEqual(Array.from({ length: KEY_RATE.burst }, () => 200))
    expect(statuses.at(-1)).toBe(429)
    expect((await send((await newKey()).key, [item(500, 500)])).status).toBe(200)
  })
})

describe('npm run api-key', () => {
  const run = (...words: string[]) =>
    promisify(execFile)(
      process.execPath,
      ['--import', 'tsx', path.resolve('ingest/setup/api-key.ts'), ...words],
      {
        env: { PATH: process.env.PATH, NODE_ENV: 'test', DATABASE_URL: db.appUrl },
      },
    )
  it('prints a key once, and it works', async () => {
    const { stdout, stderr } = await run('--building', 'mill', '--name', 'plant room')
    expect(stderr).toContain('shown once')
    expect((await answered(await send(stdout.trim(), [item(600, 500)]))).stored).toBe(1)
    const stored = await rows<{ name: string; key_sha256: string }>(
      db.database,
      `SELECT name, key_sha256 FROM api_keys WHERE name = 'plant room'`,
    )
    expect(stored).toHaveLength(1)
    expect(JSON.stringify(stored)).not.toContain(stdout.trim())
  })
  it('says what is wrong', async () => {
    await expect(run('--building', 'moon', '--name', 'x')).rejects.toMatchObject({
      code: 2,
      stderr: expect.stringContaining('known are: mill, other'),
    })
    await expect(run('--building', 'mill')).rejects.toMatchObject({ code: 2 })
  })
})

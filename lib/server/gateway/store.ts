import { createHash } from 'node:crypto'
import type pg from 'pg'
import { claimIdempotencyKey, keepAnswer } from '@/db/changes/api-answers'
import { ANSWER_KEPT_MS } from '@/db/changes/api-keys'
import { ensureReadingsMonths, type ReadingRow, storeReadings } from '@/db/changes/readings'
import { addRefusals, type RefusalRow } from '@/db/changes/refusals'
import type { Database } from '@/db/client'
import type { StandingKey } from '@/db/queries/api-keys'
import { type Device, findSensorDevices } from '@/db/queries/devices'
import { findStoredInstants, instantKey } from '@/db/queries/stored-instants'
import { Refusal } from '@/lib/errors'
import {
  type GatewayAnswer,
  type GatewayItem,
  type GatewayResult,
  gatewayAnswer,
  takeGatewayItem,
} from '@/lib/wire/gateway'
import { LIVE_CHANNEL, liveNotice } from '@/lib/wire/live'
import type { WireRefusal } from '@/lib/wire/mqtt'
import { deviceIdKey } from '@/lib/wire/topics'

export type GatewayRequest = {
  key: StandingKey
  idempotencyKey: string | null
  /** the body as it came, for telling two requests with one idempotency key apart */
  text: string
  items: readonly unknown[]
  now: Date
}

/**
 * Stores the readings of one request in one transaction and answers each item: stored, duplicate, or refused with its reason. The answer
 * is kept with the idempotency key in the same transaction; the same request again gets it again, another body under the key is refused.
 */
export async function storeGatewayRequest(
  database: Database,
  request: GatewayRequest,
): Promise<{ answer: GatewayAnswer; isRepeat: boolean }> {
  const run = () =>
    database.asSystemRaw('gateway', async (client) => {
      await client.query(`SET LOCAL synchronous_commit = on`)
      const claim = await claimOf(client, request)
      if (claim !== null) return { answer: claim, isRepeat: true }
      const answer = await storeItems(client, request)
      if (request.idempotencyKey !== null)
        await keepAnswer(client, { apiKeyId: request.key.id, idempotencyKey: request.idempotencyKey }, answer)
      return { answer, isRepeat: false }
    })
  try {
    return await run()
  } catch (error) {
    if (!isMissingMonth(error)) throw error
    const receivedMs = request.now.getTime()
    const taken = request.items.map((item) => takeGatewayItem(item, receivedMs))
    const instants = taken.flatMap((item) => ('reading' in item ? [item.reading.atMs] : []))
    await database.asSystemRaw('gateway', (client) => ensureReadingsMonths(client, instants))
    return run()
  }
}

function isMissingMonth(error: unknown): boolean {
  return (
    error instanceof Error &&
    'code' in error &&
    error.code === '23514' &&
    error.message.includes('no partition')
  )
}

/** The earlier answer to this request, or null where it is new. */
async function claimOf(client: pg.ClientBase, request: GatewayRequest): Promise<GatewayAnswer | null> {
  const { key, idempotencyKey, text, now } = request
  if (idempotencyKey === null) return null
  const bodySha256 = createHash('sha256').update(text).digest('hex')
  const claim = await claimIdempotencyKey(client, {
    apiKeyId: key.id,
    idempotencyKey,
    bodySha256,
    now,
    keptMs: ANSWER_KEPT_MS,
  })
  if (claim.kind === 'ours') return null
  if (claim.kind === 'answered') return claim.answer as GatewayAnswer
  throw new Refusal(
    'invalid',
    'This Idempotency-Key was used within a day for another body. Nothing was stored. Use a new key for new readings.',
    { fields: { 'Idempotency-Key': ['was used for another body'] } },
  )
}

type Placed = { index: number; row: ReadingRow; notes: WireRefusal[] }

async function storeItems(client: pg.ClientBase, request: GatewayRequest): Promise<GatewayAnswer> {
  const receivedMs = request.now.getTime()
  const items = request.items.map((item) => takeGatewayItem(item, receivedMs))
  const devices = await devicesOf(client, request.key, items)
  const results: GatewayResult[] = []
  const refusals: RefusalRow[] = []
  const placed: Placed[] = []
  const refuse = (index: number, refusal: WireRefusal, device: Device | undefined) => {
    results[index] = { status: 'refused', reason: refusal.reason, detail: refusal.detail }
    refusals.push(refusalRow(request, refusal, device, request.items[index]))
  }
  for (const [index, item] of items.entries()) {
    const device = item.deviceId === null ? undefined : devices.get(deviceIdKey(item.deviceId))
    if ('refusal' in item) refuse(index, item.refusal, device)
    else if (!device) refuse(index, unknownDevice, undefined)
    else if (device.retired) refuse(index, retiredDevice, device)
    else {
      const row = { ...item.reading, sensorId: device.id, buildingId: device.buildingId, receivedMs }
      placed.push({ index, row, notes: item.notes })
      for (const note of item.notes) refusals.push(refusalRow(request, note, device, request.items[index]))
    }
  }
  const rows = placed.map(({ row }) => row)
  const known = await findStoredInstants(client, rows)
  const { conflicts } = await storeReadings(client, rows)
  const refused = new Set(conflicts)
  for (const { index, row, notes } of placed) {
    if (refused.has(row)) {
      const device = [...devices.values()].find(({ id }) => id === row.sensorId)
      refuse(index, conflicting(row), device)
      continue
    }
    const status = known.has(instantKey(row)) ? 'duplicate' : 'stored'
    known.add(instantKey(row))
    results[index] =
      notes.length > 0 ? { status, note: notes.map(({ detail }) => detail).join('; ') } : { status }
  }
  await addRefusals(client, mergedBySource(refusals))
  if (rows.length > 0) {
    const notice = liveNotice('readings', new Set(rows.map(({ buildingId }) => buildingId)))
    await client.query('SELECT pg_notify($1, $2)', [LIVE_CHANNEL, JSON.stringify(notice)])
  }
  return gatewayAnswer(results)
}

/** The registered sensors among the items that this key may write to. */
async function devicesOf(
  client: pg.ClientBase,
  key: StandingKey,
  items: readonly GatewayItem[],
): Promise<Map<string, Device>> {
  const keys = [
    ...new Set(items.flatMap(({ deviceId }) => (deviceId === null ? [] : [deviceIdKey(deviceId)]))),
  ]
  const found = await findSensorDevices(client, keys)
  const own = found.filter(
    ({ organizationId, buildingId }) =>
      organizationId === key.organizationId && (key.buildingId === null || key.buildingId === buildingId),
  )
  return new Map(own.map((device) => [deviceIdKey(device.deviceId), device]))
}

const unknownDevice: WireRefusal = {
  reason: 'unknown-device',
  detail: 'no sensor of this id is registered where this key may write',
}
const retiredDevice: WireRefusal = { reason: 'retired-device', detail: 'this sensor is retired' }

function conflicting(row: ReadingRow): WireRefusal {
  const at = new Date(row.atMs).toISOString()
  return {
    reason: 'conflicts-with-stored',
    detail: `co2_ppm ${row.co2Ppm} at ${at}: another value is stored for this instant and stays`,
  }
}

function refusalRow(
  { key, now }: GatewayRequest,
  { reason, detail }: WireRefusal,
  device: Device | undefined,
  item: unknown,
): RefusalRow {
  const atMs = now.getTime()
  return {
    organizationId: key.organizationId,
    sensorId: device?.id ?? null,
    source: device?.deviceId ?? `key ${key.publicId}`,
    reason,
    count: 1,
    firstMs: atMs,
    lastMs: atMs,
    detail,
    sample: JSON.stringify(item) ?? null,
  }
}

/** One row for each source and reason: one statement may not touch a row twice. */
function mergedBySource(rows: readonly RefusalRow[]): RefusalRow[] {
  const merged = new Map<string, RefusalRow>()
  for (const row of rows) {
    const held = merged.get(`${row.source}\n${row.reason}`)
    if (held) held.count += 1
    else merged.set(`${row.source}\n${row.reason}`, { ...row })
  }
  return [...merged.values()]
}

/** Payloads of the MQTT interface, version 1: readings, status, supply. */
import { z } from 'zod'
import { isRecord, type Parsed, takeItem } from './mqtt-items'
import type { WireRefusal } from './mqtt-refusals'
import { readTime, timeNotKnown } from './mqtt-time'
import { isSenml, SENML_RECORDS_MAX, takeSenml } from './senml'

export type { Parsed, WireReading } from './mqtt-items'
export { REFUSAL_REASONS, type RefusalReason, type WireRefusal } from './mqtt-refusals'

/** Readings in one message at most. */
export const ITEMS_MAX = 500
/** Bytes of one payload that are read; a larger one is refused unread. */
export const PAYLOAD_MAX_BYTES = 256 * 1024
/** Bytes of a refused payload that are kept as its sample. */
export const SAMPLE_MAX_BYTES = 2048

const utf8 = new TextDecoder('utf-8', { fatal: true })
const lenient = new TextDecoder('utf-8')

function readJson(payload: Uint8Array): { value: unknown } | WireRefusal {
  if (payload.byteLength > PAYLOAD_MAX_BYTES)
    return {
      reason: 'too-large',
      detail: `${payload.byteLength} bytes: expected at most ${PAYLOAD_MAX_BYTES}`,
    }
  try {
    return { value: JSON.parse(utf8.decode(payload)) as unknown }
  } catch (error) {
    const said = error instanceof SyntaxError ? error.message.slice(0, 120) : 'not UTF-8'
    return { reason: 'bad-json', detail: payload.byteLength === 0 ? 'empty payload' : said }
  }
}

/**
 * Reads the payload of a readings topic: one object, a list of up to 500, or a SenML pack; item by item, so that a bad one does not
 * cost the others. `receivedMs` is the time of arrival in epoch milliseconds; where the message was `held` by a broker it stands for no
 * missing time. Never throws.
 */
export function parseReadings(payload: Uint8Array, receivedMs: number, held = false): Parsed {
  const out: Parsed = { readings: [], refusals: [] }
  const json = readJson(payload)
  if ('reason' in json) out.refusals.push(json)
  else if (Array.isArray(json.value)) takeList(json.value, receivedMs, out, held)
  else if (isRecord(json.value)) takeItem(json.value, receivedMs, '', out, held)
  else out.refusals.push({ reason: 'bad-payload', detail: 'expected an object or a list of objects' })
  return out
}

function takeList(items: readonly unknown[], receivedMs: number, out: Parsed, held: boolean): void {
  const senml = isSenml(items)
  const most = senml ? SENML_RECORDS_MAX : ITEMS_MAX
  if (items.length === 0) out.refusals.push({ reason: 'bad-payload', detail: 'an empty list' })
  else if (items.length > most)
    out.refusals.push({ reason: 'too-many-items', detail: `${items.length} items: expected at most ${most}` })
  else if (senml) takeSenml(items, receivedMs, out, held)
  else
    for (const [index, item] of items.entries()) takeItem(item, receivedMs, `item ${index + 1}: `, out, held)
}

const statusSchema = z.enum(['online', 'offline'])

/** Reads the payload of a status topic: the bare word online or offline. */
export function parseStatus(payload: Uint8Array): { status: 'online' | 'offline' } | WireRefusal {
  const parsed = statusSchema.safeParse(payload.byteLength <= 16 ? lenient.decode(payload) : undefined)
  return parsed.success
    ? { status: parsed.data }
    : { reason: 'bad-payload', detail: 'status: expected online or offline' }
}

const supplySchema = z.object({
  state: z.enum(['on', 'reduced', 'off'], { error: 'expected on, reduced or off' }),
  outdoor_fraction: z
    .number({ error: 'expected a number from 0 to 1' })
    .min(0, 'expected a number from 0 to 1')
    .max(1, 'expected a number from 0 to 1')
    .nullish(),
  supply_lps: z
    .number({ error: 'expected a number of L/s from 0 to 1000000' })
    .min(0, 'expected a number of L/s from 0 to 1000000')
    .max(1e6, 'expected a number of L/s from 0 to 1000000')
    .nullish(),
})

/** What an air handler's supply is from `atMs` on: litres a second, and the share of outdoor air in it. */
export type WireSupplyState = {
  atMs: number
  state: 'on' | 'reduced' | 'off'
  outdoorFraction: number | null
  supplyLps: number | null
}

/** Reads the payload of a supply topic: one state. Never throws. */
export function parseSupply(
  payload: Uint8Array,
  receivedMs: number,
  held = false,
): WireSupplyState | WireRefusal {
  const json = readJson(payload)
  if ('reason' in json) return json
  if (!isRecord(json.value)) return { reason: 'bad-payload', detail: 'expected an object with state' }
  const isTimeless = (json.value.t ?? null) === null
  const atMs = held && isTimeless ? timeNotKnown : readTime(json.value.t, receivedMs)
  if (typeof atMs !== 'number') return atMs
  const parsed = supplySchema.safeParse(json.value)
  if (!parsed.success) {
    const issue = parsed.error.issues[0]
    return { reason: 'bad-payload', detail: `${issue?.path.join('.')}: ${issue?.message}` }
  }
  const { state, outdoor_fraction: outdoorFraction, supply_lps: supplyLps } = parsed.data
  return { atMs, state, outdoorFraction: outdoorFraction ?? null, supplyLps: supplyLps ?? null }
}

/** The part of a refused payload that is kept: at most 2 kB of text, without signs that a database cannot keep. */
export function sampleOf(payload: Uint8Array): string {
  const part = payload.subarray(0, SAMPLE_MAX_BYTES)
  const isText = part.every((byte) => byte >= 32 || byte === 9 || byte === 10 || byte === 13)
  if (isText) return cutToBytes(lenient.decode(part), SAMPLE_MAX_BYTES)
  const hex = Array.from(part.subarray(0, 128), (byte) => byte.toString(16).padStart(2, '0')).join(' ')
  return `binary, first ${Math.min(128, part.length)} of ${payload.byteLength} bytes: ${hex}`
}

const encoder = new TextEncoder()

function cutToBytes(text: string, most: number): string {
  let cut = text
  while (encoder.encode(cut).byteLength > most) cut = cut.slice(0, Math.floor(cut.length * 0.9))
  return cut
}

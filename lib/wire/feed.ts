/** How messages of another system become readings: where device, time and quantities stand in topic and payload, and in which unit. */
import { z } from 'zod'
import { atPointer, isJsonPointer } from './json-pointer'
import { PAYLOAD_MAX_BYTES, type WireReading, type WireRefusal } from './mqtt'
import { type Parsed, takeItem } from './mqtt-items'
import { shown } from './mqtt-refusals'
import { isDeviceId } from './topics'

/** Units that a quantity may come in, and what a value must be multiplied by and added to become ours (ppm, °C, %, %, dBm). */
export const FEED_UNITS = {
  co2: {
    ppm: { factor: 1, offset: 0 },
    'percent by volume': { factor: 10_000, offset: 0 },
    'fraction by volume': { factor: 1_000_000, offset: 0 },
  },
  temp: {
    '°C': { factor: 1, offset: 0 },
    K: { factor: 1, offset: -273.15 },
    '°F': { factor: 5 / 9, offset: -160 / 9 },
  },
  rh: { '%': { factor: 1, offset: 0 }, fraction: { factor: 100, offset: 0 } },
  battery: { '%': { factor: 1, offset: 0 }, fraction: { factor: 100, offset: 0 } },
  rssi: { dBm: { factor: 1, offset: 0 } },
} as const satisfies Record<string, Record<string, { factor: number; offset: number }>>

export const FEED_QUANTITIES = ['co2', 'temp', 'rh', 'battery', 'rssi'] as const
export type FeedQuantity = (typeof FEED_QUANTITIES)[number]

const fields: Record<FeedQuantity, string> = {
  co2: 'co2_ppm',
  temp: 'temp_c',
  rh: 'rh_pct',
  battery: 'battery_pct',
  rssi: 'rssi_dbm',
}

export const FEED_TIME_FORMATS = ['any', 'iso', 'seconds', 'milliseconds'] as const

const pointerSchema = z
  .string()
  .max(200, 'At most 200 signs.')
  .refine(
    isJsonPointer,
    'A JSON Pointer begins with / and names one level after the other, e.g. /values/co2.',
  )

const quantitySchema = <Q extends FeedQuantity>(quantity: Q) =>
  z.object({
    pointer: pointerSchema,
    unit: z.enum(Object.keys(FEED_UNITS[quantity]) as [string, ...string[]]),
    /** values are multiplied by it before the unit is applied, e.g. 0.1 where tenths are sent */
    scale: z.number().refine((scale) => scale !== 0 && Math.abs(scale) <= 1e6, 'Not 0, at most a million.'),
  })

/** Exactly one of `topicLevel` (from 1) and `pointer` says where the device id stands. */
const deviceSchema = z.union([
  z.object({ topicLevel: z.number().int().min(1).max(50) }),
  z.object({ pointer: pointerSchema }),
])

export const feedMappingSchema = z.object({
  /** where several readings come in one message: the list; each further pointer is then inside an item of it */
  items: pointerSchema.nullable(),
  device: deviceSchema,
  time: z.object({ pointer: pointerSchema, format: z.enum(FEED_TIME_FORMATS) }).nullable(),
  co2: quantitySchema('co2'),
  temp: quantitySchema('temp').nullable(),
  rh: quantitySchema('rh').nullable(),
  battery: quantitySchema('battery').nullable(),
  rssi: quantitySchema('rssi').nullable(),
})

export type FeedMapping = z.infer<typeof feedMappingSchema>

/** One reading with the device id that the feed names. */
export type FeedReading = { deviceId: string; reading: WireReading }
export type FeedParsed = { readings: FeedReading[]; refusals: (WireRefusal & { deviceId: string | null })[] }

/** Items of one message at most. */
const ITEMS_MAX = 2000

/** True where a subscription may ask for the filter: `+` a whole level, `#` the last level, no zero sign (MQTT 5 §4.7). */
export function isTopicFilter(filter: string): boolean {
  if (filter === '' || filter.length > 500 || filter.includes('\u0000') || filter.startsWith('$share/'))
    return false
  const levels = filter.split('/')
  return levels.every(
    (level, index) => level === '+' || (level === '#' && index === levels.length - 1) || !/[+#]/.test(level),
  )
}

const utf8 = new TextDecoder('utf-8', { fatal: true })

/**
 * Maps one message: what would be stored, and what not and why. Pure; `receivedMs` is its arrival (epoch milliseconds), which stands for
 * a missing time unless the message was `held` by the broker. Never throws.
 */
export function mapFeedMessage(
  mapping: FeedMapping,
  message: { topic: string; payload: Uint8Array; held: boolean },
  receivedMs: number,
): FeedParsed {
  const out: FeedParsed = { readings: [], refusals: [] }
  const refuse = (reason: WireRefusal['reason'], detail: string) =>
    out.refusals.push({ reason, detail, deviceId: null })
  let value: unknown
  if (message.payload.byteLength > PAYLOAD_MAX_BYTES) {
    refuse('too-large', `${message.payload.byteLength} bytes: expected at most ${PAYLOAD_MAX_BYTES}`)
    return out
  }
  try {
    value = JSON.parse(utf8.decode(message.payload))
  } catch (error) {
    refuse('bad-json', error instanceof SyntaxError ? error.message.slice(0, 120) : 'not UTF-8')
    return out
  }
  const items = mapping.items === null ? [value] : atPointer(value, mapping.items)
  if (!Array.isArray(items))
    refuse('bad-payload', `${mapping.items || 'the payload'} is ${shown(items)}: expected a list`)
  else if (items.length > ITEMS_MAX)
    refuse('too-many-items', `${items.length} items: expected at most ${ITEMS_MAX}`)
  else
    for (const [index, item] of items.entries())
      mapItem(
        mapping,
        message,
        { item, where: items.length > 1 ? `item ${index + 1}: ` : '' },
        receivedMs,
        out,
      )
  return out
}

function mapItem(
  mapping: FeedMapping,
  { topic, held }: { topic: string; held: boolean },
  { item, where }: { item: unknown; where: string },
  receivedMs: number,
  out: FeedParsed,
): void {
  const named = deviceIdOf(mapping, topic, item)
  if (typeof named !== 'string') {
    out.refusals.push({ reason: named.reason, detail: where + named.detail, deviceId: null })
    return
  }
  const ours: Record<string, unknown> = {}
  if (mapping.time) ours.t = timeOf(mapping.time.format, atPointer(item, mapping.time.pointer))
  for (const quantity of FEED_QUANTITIES) {
    const from = mapping[quantity]
    if (from) ours[fields[quantity]] = quantityOf(quantity, from, atPointer(item, from.pointer))
  }
  const parsed: Parsed = { readings: [], refusals: [] }
  takeItem(ours, receivedMs, where, parsed, held)
  for (const reading of parsed.readings) out.readings.push({ deviceId: named, reading })
  for (const refusal of parsed.refusals) out.refusals.push({ ...refusal, deviceId: named })
}

/** A device id found in topic or payload; a number is taken as its digits. */
function deviceIdOf(mapping: FeedMapping, topic: string, item: unknown): string | WireRefusal {
  const { device } = mapping
  const found =
    'topicLevel' in device ? topic.split('/')[device.topicLevel - 1] : atPointer(item, device.pointer)
  const text = typeof found === 'number' ? String(found) : found
  if (typeof text === 'string' && isDeviceId(text)) return text
  const place =
    'topicLevel' in device ? `level ${device.topicLevel} of the topic` : device.pointer || 'the item'
  return {
    reason: 'bad-payload',
    detail: `${place} is ${found === undefined ? 'not there' : shown(found)}: expected a device id (1 to 64 of letters, digits, . _ : -)`,
  }
}

/** A value in our unit; numbers written as text are taken; what is none is left for the check to refuse by name. */
function quantityOf(quantity: FeedQuantity, from: { unit: string; scale: number }, found: unknown): unknown {
  if (found === undefined || found === null) return undefined
  const number = typeof found === 'string' && found.trim() !== '' ? Number(found) : found
  if (typeof number !== 'number' || !Number.isFinite(number)) return found
  const units: Record<string, { factor: number; offset: number }> = FEED_UNITS[quantity]
  const { factor, offset } = units[from.unit] ?? { factor: 1, offset: 0 }
  // thousandths are beyond any sensor; without rounding 0.0612 % would be 612.0000000000001 ppm
  return Math.round((number * from.scale * factor + offset) * 1000) / 1000
}

/** The time in the form in which our own messages have it: ISO text, or epoch seconds. */
function timeOf(format: (typeof FEED_TIME_FORMATS)[number], found: unknown): unknown {
  if (format === 'any' || found === undefined || found === null) return found
  if (format === 'iso') return typeof found === 'string' ? found : { expected: 'ISO 8601' }
  const number = typeof found === 'string' && found.trim() !== '' ? Number(found) : found
  if (typeof number !== 'number') return found
  return format === 'seconds' ? number : number / 1000
}

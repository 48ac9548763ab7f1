/** Sensor Measurement Lists, JSON form (RFC 8428), as far as a CO2 sensor needs them. */
import { isRecord, type Parsed, takeItem } from './mqtt-items'
import type { WireRefusal } from './mqtt-refusals'
import { arrivalMs, timeNotKnown } from './mqtt-time'

/** Records of one pack at most: 500 readings of five quantities. */
export const SENML_RECORDS_MAX = 2500
/** Times below 2^28 s are relative to now (RFC 8428 §4.5.3). */
const leastAbsoluteS = 2 ** 28
/** The version of SenML that RFC 8428 defines (§4.4). */
const senmlVersion = 10

const senmlKeys = ['n', 'bn', 'v', 'bv', 'u', 'bu', 'bt', 'bver', 'vs', 'vb', 'vd', 's', 'bs']

const quantities: Record<string, { field: string; units: Record<string, (value: number) => number> }> = {
  co2: { field: 'co2_ppm', units: { ppm: same } },
  temp: { field: 'temp_c', units: { Cel: same, K: (kelvin) => kelvin - 273.15 } },
  rh: { field: 'rh_pct', units: { '%RH': same } },
  battery: { field: 'battery_pct', units: { '%EL': same, '%': same } },
  rssi: { field: 'rssi_dbm', units: { dBm: same, dBW: (dBW) => dBW + 30 } },
}

function same(value: number): number {
  return value
}

/** True where a parsed payload is a SenML pack: a list with a record that has SenML labels and not our own. */
export function isSenml(items: readonly unknown[]): boolean {
  return items.some(
    (item) => isRecord(item) && !('co2_ppm' in item) && senmlKeys.some((key) => Object.hasOwn(item, key)),
  )
}

const labelTypes = new Map<string, 'string' | 'number'>([
  ['n', 'string'],
  ['bn', 'string'],
  ['u', 'string'],
  ['bu', 'string'],
  ['v', 'number'],
  ['bv', 'number'],
  ['t', 'number'],
  ['bt', 'number'],
  ['bver', 'number'],
])

type Base = { name: string; timeS: number; unit: string | undefined; value: number }

/** Resolves a pack (base name, time, unit, value) and takes one reading per resolved time. */
export function takeSenml(records: readonly unknown[], receivedMs: number, out: Parsed, held = false): void {
  const base: Base = { name: '', timeS: 0, unit: undefined, value: 0 }
  const byTime = new Map<number, Record<string, unknown>>()
  for (const [index, record] of records.entries()) {
    const refusal = takeRecord(record, base, { receivedMs, held }, byTime)
    if (refusal)
      out.refusals.push({ reason: refusal.reason, detail: `record ${index + 1}: ${refusal.detail}` })
  }
  for (const [atMs, item] of byTime) {
    takeItem(item, receivedMs, `at ${new Date(atMs).toISOString()}: `, out)
  }
}

function takeRecord(
  record: unknown,
  base: Base,
  arrival: { receivedMs: number; held: boolean },
  byTime: Map<number, Record<string, unknown>>,
): WireRefusal | undefined {
  if (!isRecord(record)) return { reason: 'bad-payload', detail: 'expected an object' }
  const fault = faultOf(record)
  if (fault) return fault
  if (typeof record.bn === 'string') base.name = record.bn
  if (typeof record.bt === 'number') base.timeS = record.bt
  if (typeof record.bu === 'string') base.unit = record.bu
  if (typeof record.bv === 'number') base.value = record.bv
  const name = base.name + (typeof record.n === 'string' ? record.n : '')
  const quantity =
    quantities[/(?:^|[^A-Za-z0-9])(co2|temp|rh|battery|rssi)$/i.exec(name)?.[1]?.toLowerCase() ?? '']
  if (!quantity || (record.v === undefined && record.bv === undefined)) return undefined
  const unit = typeof record.u === 'string' ? record.u : base.unit
  const convert = unit === undefined ? same : quantity.units[unit]
  if (!convert)
    return {
      reason: 'wrong-unit',
      detail: `unit "${String(unit).slice(0, 20)}" of ${quantity.field}: expected ${Object.keys(quantity.units).join(' or ')}`,
    }
  const timeS = base.timeS + (typeof record.t === 'number' ? record.t : 0)
  if (arrival.held && timeS < leastAbsoluteS) return timeNotKnown
  const atMs = timeOf(timeS, arrival.receivedMs)
  if (Math.abs(atMs) > 8.64e15) return { reason: 'bad-time', detail: 'bt + t is no time' }
  const item = byTime.get(atMs) ?? { t: atMs / 1000 }
  item[quantity.field] = convert(base.value + (typeof record.v === 'number' ? record.v : 0))
  byTime.set(atMs, item)
  return undefined
}

/** A label of the wrong type, a newer version, or a label that must be understood (ends in "_") and is not (RFC 8428 §4.4). */
function faultOf(record: Record<string, unknown>): WireRefusal | undefined {
  for (const [label, value] of Object.entries(record)) {
    const expected = labelTypes.get(label)
    if (label.endsWith('_'))
      return { reason: 'bad-payload', detail: `label ${label.slice(0, 20)} is not understood` }
    if (expected && typeof value !== expected)
      return { reason: 'wrong-type', detail: `${label}: expected a ${expected}` }
  }
  if (typeof record.bver === 'number' && record.bver > senmlVersion)
    return { reason: 'bad-payload', detail: `SenML version ${record.bver}: expected ${senmlVersion} or less` }
  return undefined
}

function timeOf(timeS: number, receivedMs: number): number {
  return timeS < leastAbsoluteS ? arrivalMs(receivedMs) + Math.round(timeS) * 1000 : Math.round(timeS * 1000)
}

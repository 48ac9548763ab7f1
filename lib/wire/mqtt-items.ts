/** One reading as a device sends it, checked. */
import { z } from 'zod'
import { shown, type WireRefusal } from './mqtt-refusals'
import { readTime, timeNotKnown } from './mqtt-time'

/** A reading taken: epoch milliseconds, ppm, °C, %, %, dBm. `marked`: stored although outside 350 to 5000 ppm. */
export type WireReading = {
  atMs: number
  co2Ppm: number
  tempC: number | null
  rhPct: number | null
  batteryPct: number | null
  rssiDbm: number | null
  marked: boolean
}

export type Parsed = { readings: WireReading[]; refusals: WireRefusal[] }

/** Outside these a CO2 value is refused, between them and PLAUSIBLE_CO2_PPM it is stored and marked. */
export const ACCEPTED_CO2_PPM = { min: 1, max: 50_000 } as const
/** Fresh outdoor air is not below 350 ppm nor an occupied room above 5000 ppm without a reason worth a look (common practice, no source). */
export const PLAUSIBLE_CO2_PPM = { min: 350, max: 5000 } as const

const co2Schema = z.number().min(ACCEPTED_CO2_PPM.min).max(ACCEPTED_CO2_PPM.max)

/** What may stand beside co2_ppm, with the limits of what a sensor in a room can say. */
const optionalQuantities = {
  temp_c: { schema: z.number().min(-60).max(100), expected: 'a number from -60 to 100 (°C)' },
  rh_pct: { schema: z.number().min(0).max(105), expected: 'a number from 0 to 105 (%)' },
  battery_pct: { schema: z.number().min(0).max(100), expected: 'a number from 0 to 100 (%)' },
  rssi_dbm: { schema: z.number().min(-200).max(50), expected: 'a number from -200 to 50 (dBm)' },
} as const

type Quantity = keyof typeof optionalQuantities

/** True for a plain JSON object. */
export function isRecord(value: unknown): value is Record<string, unknown> {
  return typeof value === 'object' && value !== null && !Array.isArray(value)
}

/**
 * Takes one item. A bad time or CO2 value refuses it; a bad value beside CO2 is refused alone and the reading is kept without it.
 * Unknown fields are passed by. `where` names the item in the refusal, e.g. "item 3: ". `held`: a broker may have kept the message, so
 * the time of arrival cannot stand for a missing one.
 */
export function takeItem(item: unknown, receivedMs: number, where: string, out: Parsed, held = false): void {
  if (!isRecord(item)) {
    out.refusals.push({ reason: 'bad-payload', detail: `${where}expected an object with co2_ppm` })
    return
  }
  const atMs = held && (item.t ?? null) === null ? timeNotKnown : readTime(item.t, receivedMs)
  if (typeof atMs !== 'number') {
    out.refusals.push({ reason: atMs.reason, detail: where + atMs.detail })
    return
  }
  const co2 = co2Of(item.co2_ppm)
  if (typeof co2 !== 'number') {
    out.refusals.push({ reason: co2.reason, detail: where + co2.detail })
    return
  }
  const quantity = (name: Quantity) => quantityOf(name, item[name], where, out)
  const battery = quantity('battery_pct')
  const rssi = quantity('rssi_dbm')
  out.readings.push({
    atMs,
    co2Ppm: co2,
    tempC: quantity('temp_c'),
    rhPct: quantity('rh_pct'),
    batteryPct: battery === null ? null : Math.round(battery),
    rssiDbm: rssi === null ? null : Math.round(rssi),
    marked: co2 < PLAUSIBLE_CO2_PPM.min || co2 > PLAUSIBLE_CO2_PPM.max,
  })
}

function co2Of(value: unknown): number | WireRefusal {
  if (value === undefined || value === null)
    return { reason: 'missing-co2', detail: 'co2_ppm is missing: expected a number from 1 to 50000 (ppm)' }
  const parsed = co2Schema.safeParse(value)
  return parsed.success ? parsed.data : badValue('co2_ppm', value, 'a number from 1 to 50000 (ppm)')
}

function quantityOf(name: Quantity, value: unknown, where: string, out: Parsed): number | null {
  if (value === undefined || value === null) return null
  const { schema, expected } = optionalQuantities[name]
  const parsed = schema.safeParse(value)
  if (parsed.success) return parsed.data
  const refusal = badValue(name, value, expected)
  out.refusals.push({
    reason: refusal.reason,
    detail: `${where}${refusal.detail}; the reading was kept without it`,
  })
  return null
}

function badValue(name: string, value: unknown, expected: string): WireRefusal {
  return {
    reason: typeof value === 'number' ? 'implausible-value' : 'wrong-type',
    detail: `${name} = ${shown(value)}: expected ${expected}`,
  }
}

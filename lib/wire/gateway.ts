/** Readings that a gateway sends over HTTP: items with a device id each, and an answer for each. */
import { z } from 'zod'
import { ITEMS_MAX, type RefusalReason, type WireReading, type WireRefusal } from './mqtt'
import { isRecord, type Parsed, takeItem } from './mqtt-items'
import { shown } from './mqtt-refusals'
import { isDeviceId } from './topics'

export const gatewayBodySchema = z
  .array(z.unknown(), 'expected a list of readings, each { device_id, t, co2_ppm, … }')
  .min(1, 'expected at least one reading')
  .max(ITEMS_MAX, `expected at most ${ITEMS_MAX} readings; send the rest in a further request`)

/** An item read: its reading, or why it has none. `notes`: values beside CO2 that were left out. */
export type GatewayItem =
  | { deviceId: string; reading: WireReading; notes: WireRefusal[] }
  | { deviceId: string | null; refusal: WireRefusal }

/** Reads one item; a missing `t` is the time of arrival (epoch milliseconds) to the second. Never throws. */
export function takeGatewayItem(item: unknown, receivedMs: number): GatewayItem {
  if (!isRecord(item))
    return {
      deviceId: null,
      refusal: { reason: 'bad-payload', detail: 'expected an object with device_id and co2_ppm' },
    }
  const deviceId = item.device_id
  if (typeof deviceId !== 'string' || !isDeviceId(deviceId))
    return {
      deviceId: null,
      refusal: {
        reason: 'unknown-device',
        detail: `device_id = ${shown(deviceId)}: expected 1 to 64 of letters, digits, . _ : -`,
      },
    }
  const parsed: Parsed = { readings: [], refusals: [] }
  takeItem(item, receivedMs, '', parsed)
  const [reading] = parsed.readings
  if (reading) return { deviceId, reading, notes: parsed.refusals }
  return { deviceId, refusal: parsed.refusals[0]! }
}

/** What became of one item, in the order of the request. `duplicate`: the same value was stored before. */
export type GatewayResult =
  | { status: 'stored' | 'duplicate'; note?: string }
  | { status: 'refused'; reason: RefusalReason; detail: string }

export type GatewayAnswer = { stored: number; duplicate: number; refused: number; results: GatewayResult[] }

/** The answer with its sums. */
export function gatewayAnswer(results: GatewayResult[]): GatewayAnswer {
  const count = (status: GatewayResult['status']) =>
    results.filter((result) => result.status === status).length
  return { stored: count('stored'), duplicate: count('duplicate'), refused: count('refused'), results }
}

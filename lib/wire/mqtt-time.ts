/** The time of a reading as devices write it. */
import { shown, type WireRefusal } from './mqtt-refusals'

/** A reading may be this far ahead of its arrival. */
export const FUTURE_LIMIT_MS = 10 * 60_000
/** A reading may be this old at its arrival. */
export const AGE_LIMIT_MS = 400 * 86_400_000
/** Numbers from here on are epoch milliseconds, below epoch seconds. */
const leastEpochMs = 1e11

const isoPattern =
  /^(\d{4})-(\d{2})-(\d{2})[Tt ](\d{2}):(\d{2})(?::(\d{2})(?:[.,](\d{1,9}))?)?(?:[Zz]|([+-])(\d{2}):?(\d{2}))$/

/**
 * Epoch milliseconds of an ISO 8601 instant with Z or offset; undefined where the text is none, has no offset, or names a day or
 * hour that does not exist (30 February, 25:00).
 */
export function isoToEpochMs(text: string): number | undefined {
  const match = isoPattern.exec(text)
  if (!match) return undefined
  const [year, month, day, hour, minute] = match.slice(1, 6).map(Number) as [
    number,
    number,
    number,
    number,
    number,
  ]
  const second = Number(match[6] ?? 0)
  const fractionMs = Math.round(Number(`0.${match[7] ?? 0}`) * 1000)
  if (hour > 23 || minute > 59 || second > 59) return undefined
  const utcMs = Date.UTC(year, month - 1, day, hour, minute, second)
  const back = new Date(utcMs)
  if (back.getUTCMonth() !== month - 1 || back.getUTCDate() !== day || back.getUTCFullYear() !== year)
    return undefined
  const offsetHours = Number(match[9] ?? 0)
  const offsetMinutes = Number(match[10] ?? 0)
  if (offsetHours > 15 || offsetMinutes > 59) return undefined
  const sign = match[8] === '-' ? -1 : 1
  return utcMs + fractionMs - sign * (offsetHours * 60 + offsetMinutes) * 60_000
}

/** The time of arrival to the second, which stands for a reading without a time. */
export function arrivalMs(receivedMs: number): number {
  return Math.floor(receivedMs / 1000) * 1000
}

/** Refusal of a reading without a time whose arrival says nothing of it. */
export const timeNotKnown: WireRefusal = {
  reason: 'bad-time',
  detail: 't is missing, and the broker kept the message for a while: when it was measured is not known',
}

/**
 * Epoch milliseconds of `t`: ISO 8601 with offset, epoch seconds, or epoch milliseconds (from 1e11 on); absent or null is the time of
 * arrival to the second. Refused as bad-time, time-in-future (over 10 min ahead of arrival) or time-too-old (over 400 days).
 */
export function readTime(t: unknown, receivedMs: number): number | WireRefusal {
  if (t === undefined || t === null) return arrivalMs(receivedMs)
  let atMs: number | undefined
  if (typeof t === 'number' && Number.isFinite(t)) atMs = Math.round(t >= leastEpochMs ? t : t * 1000)
  else if (typeof t === 'string') atMs = isoToEpochMs(t)
  if (atMs === undefined)
    return {
      reason: 'bad-time',
      detail: `t = ${shown(t)}: expected ISO 8601 with Z or offset, epoch seconds or epoch milliseconds`,
    }
  return withinBounds(atMs, receivedMs)
}

/** The time where it lies between 400 days before and 10 min after arrival, else its refusal. */
export function withinBounds(atMs: number, receivedMs: number): number | WireRefusal {
  if (atMs > receivedMs + FUTURE_LIMIT_MS)
    return { reason: 'time-in-future', detail: `t is ${describe(atMs)}, more than 10 minutes after arrival` }
  if (atMs < receivedMs - AGE_LIMIT_MS)
    return { reason: 'time-too-old', detail: `t is ${describe(atMs)}, more than 400 days before arrival` }
  return atMs
}

function describe(atMs: number): string {
  return Math.abs(atMs) <= 8.64e15 ? new Date(atMs).toISOString() : `${atMs} ms`
}

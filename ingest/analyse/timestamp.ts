/** ISO 8601 instants, fast: a year of minutes for a hundred rooms is fifty million of them. */

const SHAPE =
  /^(\d{4})-(\d{2})-(\d{2})[T ](\d{2}):(\d{2})(?::(\d{2})(?:[.,](\d{1,9}))?)?(Z|[+-]\d{2}(?::?\d{2})?)$/i
const dayCache = new Map<string, number>()

/** Epoch seconds of midnight UTC of a date, or NaN when there is no such date. */
function dayEpochS(date: string, year: number, month: number, day: number): number {
  const known = dayCache.get(date)
  if (known !== undefined) return known
  const epoch = Date.UTC(year, month - 1, day)
  const back = new Date(epoch)
  const valid = back.getUTCMonth() === month - 1 && back.getUTCDate() === day
  const value = valid ? epoch / 1000 : Number.NaN
  if (dayCache.size > 20_000) dayCache.clear()
  dayCache.set(date, value)
  return value
}

/** Epoch seconds of an ISO 8601 timestamp with Z or an offset; NaN when it is none (a time without offset is none). */
export function parseTimestamp(text: string): number {
  const parts = SHAPE.exec(text)
  if (!parts) return Number.NaN
  const [, year, month, day, hour, minute, second, fraction, zone] = parts
  const midnight = dayEpochS(text.slice(0, 10), Number(year), Number(month), Number(day))
  const h = Number(hour)
  const m = Number(minute)
  const s = Number(second ?? 0)
  if (h > 24 || m > 59 || s > 60 || (h === 24 && m + s > 0)) return Number.NaN
  const shift = /^z$/i.test(zone!) ? 0 : offsetS(zone!)
  return midnight + h * 3600 + m * 60 + s + (fraction ? Number(`0.${fraction}`) : 0) - shift
}

function offsetS(zone: string): number {
  const digits = zone.slice(1).replace(':', '')
  const hours = Number(digits.slice(0, 2))
  const minutes = Number(digits.slice(2) || '0')
  if (hours > 18 || minutes > 59) return Number.NaN
  return (zone[0] === '-' ? -1 : 1) * (hours * 3600 + minutes * 60)
}

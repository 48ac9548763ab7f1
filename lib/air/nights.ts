const NIGHT = /^(\d{4})-(\d{2})-(\d{2})$/
const SECONDS_PER_DAY = 86400

/**
 * Number of a building-local date in days since 1970-01-01. Dates are counted, never seconds, so 23- and 25-hour days are one day each.
 * @throws RangeError when the text is not a calendar date YYYY-MM-DD
 */
export function nightNumber(night: string): number {
  const parts = NIGHT.exec(night)
  const ms = parts ? Date.UTC(Number(parts[1]), Number(parts[2]) - 1, Number(parts[3])) : Number.NaN
  if (!parts || Number.isNaN(ms) || new Date(ms).toISOString().slice(0, 10) !== night) {
    throw new RangeError(`not a calendar date YYYY-MM-DD: ${night}`)
  }
  return ms / 1000 / SECONDS_PER_DAY
}

/** The date with this number, YYYY-MM-DD. */
export function nightOfNumber(number: number): string {
  return new Date(number * SECONDS_PER_DAY * 1000).toISOString().slice(0, 10)
}

/** The date `days` later (earlier when negative). */
export function addNights(night: string, days: number): string {
  return nightOfNumber(nightNumber(night) + days)
}

/** Whole days from one date to another; negative when `to` is earlier. */
export function nightsBetween(from: string, to: string): number {
  return nightNumber(to) - nightNumber(from)
}

/** ISO weekday of a date: 1 Monday to 7 Sunday. */
export function isoWeekday(night: string): number {
  const day = (nightNumber(night) + 3) % 7
  return (day < 0 ? day + 7 : day) + 1
}

/** Monday of the week that holds the date. */
export function weekStartOf(night: string): string {
  return addNights(night, 1 - isoWeekday(night))
}

import { addDays, isoWeekday } from '@/lib/time'
import { SECONDS_PER_DAY } from '@/lib/units'

/** Days since 1970-01-01 of a calendar date YYYY-MM-DD. Dates are counted, never seconds: 23- and 25-hour days are one day each. */
function dateNumber(date: string): number {
  const ms = Date.parse(`${date}T00:00:00Z`)
  if (Number.isNaN(ms)) throw new RangeError(`not a calendar date YYYY-MM-DD: ${date}`)
  return ms / 1000 / SECONDS_PER_DAY
}

/**
 * Whole days from one building-local date to another; negative when `to` is earlier.
 * @throws RangeError when a text is not a calendar date
 */
export function nightsBetween(from: string, to: string): number {
  return dateNumber(to) - dateNumber(from)
}

/** Monday of the week that holds the date. */
export function weekStartOf(date: string): string {
  return addDays(date, 1 - isoWeekday(date))
}

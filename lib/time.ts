/** Epoch seconds inside, a building's own zone at the edge. */
import { formatInTimeZone, fromZonedTime } from 'date-fns-tz'

/** Epoch seconds of a local wall time, e.g. `localToEpochS('2026-03-29', '12:00', 'Europe/Berlin')`. */
export function localToEpochS(date: string, time: string, timeZone: string): number {
  const full = time.length === 5 ? `${time}:00` : time
  return fromZonedTime(`${date}T${full}`, timeZone).getTime() / 1000
}

/** The local calendar date (YYYY-MM-DD) of an instant. */
export function localDate(epochS: number, timeZone: string): string {
  return formatInTimeZone(new Date(epochS * 1000), timeZone, 'yyyy-MM-dd')
}

/** The local wall time (HH:mm) of an instant. */
export function localClock(epochS: number, timeZone: string): string {
  return formatInTimeZone(new Date(epochS * 1000), timeZone, 'HH:mm')
}

/** The date that is `days` later (calendar arithmetic, no zone). */
export function addDays(date: string, days: number): string {
  return new Date(Date.parse(`${date}T00:00:00Z`) + days * 86_400_000).toISOString().slice(0, 10)
}

/** ISO weekday of a calendar date: 1 = Monday … 7 = Sunday. */
export function isoWeekday(date: string): number {
  return ((new Date(`${date}T00:00:00Z`).getUTCDay() + 6) % 7) + 1
}

/** First and last instant of a local day in epoch seconds; 23, 24 or 25 hours apart. */
export function localDayBounds(date: string, timeZone: string): { startS: number; endS: number } {
  return {
    startS: localToEpochS(date, '00:00', timeZone),
    endS: localToEpochS(addDays(date, 1), '00:00', timeZone),
  }
}

/** True when the zone's name is one the platform knows (IANA). */
export function isTimeZone(name: string): boolean {
  try {
    new Intl.DateTimeFormat('en', { timeZone: name })
    return true
  } catch {
    return false
  }
}

/** ISO 8601 with Z, to the second. */
export function isoUtc(epochS: number): string {
  return new Date(Math.round(epochS) * 1000).toISOString().replace('.000Z', 'Z')
}

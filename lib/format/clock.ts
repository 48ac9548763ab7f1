import { formatInTimeZone } from 'date-fns-tz'

/** An instant as a building reads it: "Tue 17 Nov", "14:42", "GMT". */
export function zonedStamp(timeS: number, timeZone: string): { day: string; clock: string; zone: string } {
  const at = new Date(timeS * 1000)
  return {
    day: formatInTimeZone(at, timeZone, 'EEE d MMM'),
    clock: formatInTimeZone(at, timeZone, 'HH:mm'),
    zone: zoneName(timeS, timeZone),
  }
}

/** The zone's short English name at this instant (GMT, BST, CET, EST, GMT+5:30). */
export function zoneName(timeS: number, timeZone: string): string {
  const parts = new Intl.DateTimeFormat('en-GB', { timeZone, timeZoneName: 'short' }).formatToParts(
    timeS * 1000,
  )
  return parts.find((part) => part.type === 'timeZoneName')?.value ?? timeZone
}

/** "today 14:42", "yesterday 09:10" or "Tue 17 Nov 14:42" in the building's zone. */
export function dayAndClock(timeS: number, nowS: number, timeZone: string): string {
  const { day, clock } = zonedStamp(timeS, timeZone)
  if (day === zonedStamp(nowS, timeZone).day && Math.abs(nowS - timeS) < 86_400) return clock
  if (day === zonedStamp(nowS - 86_400, timeZone).day && nowS - timeS < 2 * 86_400)
    return `yesterday ${clock}`
  return `${day} ${clock}`
}

/** A calendar date as people read it: "28 September", with the year where it is not this one's. */
export function longDate(date: string, thisYear?: string): string {
  const pattern = thisYear && date.startsWith(thisYear) ? 'd MMMM' : 'd MMMM yyyy'
  return formatInTimeZone(new Date(`${date}T12:00:00Z`), 'UTC', pattern)
}

import { addDays, isTimeZone, localDayBounds, localToEpochS } from '@/lib/time'

/** A building-local date with the instants that matter to its night, epoch seconds. */
export type NightWindow = {
  date: string
  dayStartS: number
  dayEndS: number
  /** two hours before the day */
  readFromS: number
  /** noon of the next day */
  readToS: number
  /** 04:00 of the next day: decays of the evening can be told, a figure may still move */
  provisionalFromS: number
  /** noon of the next day: nothing more is waited for */
  finalFromS: number
}

const DATE = /^\d{4}-\d{2}-\d{2}$/

/**
 * What the run for a building-local date reads and when it is due. The run for date D owns the decays that start on D; it reads from two
 * hours before the day to noon after it. Days of 23 and 25 hours are as long as they are.
 * @throws RangeError when the date is no calendar date or the zone is unknown
 */
export function nightWindow(date: string, timeZone: string): NightWindow {
  if (!DATE.test(date) || Number.isNaN(Date.parse(`${date}T00:00:00Z`)) || addDays(date, 0) !== date) {
    throw new RangeError(`not a calendar date YYYY-MM-DD: ${date}`)
  }
  if (!isTimeZone(timeZone)) throw new RangeError(`not a time zone that is known here: ${timeZone}`)
  const { startS, endS } = localDayBounds(date, timeZone)
  const next = addDays(date, 1)
  const noonS = localToEpochS(next, '12:00', timeZone)
  return {
    date,
    dayStartS: startS,
    dayEndS: endS,
    readFromS: startS - 7200,
    readToS: noonS,
    provisionalFromS: localToEpochS(next, '04:00', timeZone),
    finalFromS: noonS,
  }
}

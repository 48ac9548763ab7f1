import { addDays, localDate } from '@/lib/time'
import { nightWindow } from './analysis/window'

/** What is known of a night's last finished run. */
export type KnownRun = { localDate: string; provisional: boolean }

const HOUR_S = 3600

/**
 * The building-local dates whose run is due: from 04:00 of the next day those never run, from noon those that ran provisionally. Compares
 * local time, so that the queue's own clock (UTC) and daylight saving do not matter. In order of date.
 */
export function dueNights(input: {
  timeZone: string
  nowS: number
  /** date of the first reading; null while there is none */
  firstDate: string | null
  runs: readonly KnownRun[]
}): string[] {
  const { timeZone, nowS, firstDate } = input
  if (firstDate === null) return []
  const known = new Map(input.runs.map((run) => [run.localDate, run]))
  const today = localDate(nowS, timeZone)
  const due: string[] = []
  for (let date = firstDate; date < today; date = addDays(date, 1)) {
    const run = known.get(date)
    if (run && !run.provisional) continue
    const window = nightWindow(date, timeZone)
    if (nowS >= (run ? window.finalFromS : window.provisionalFromS)) due.push(date)
  }
  return due
}

/** The nights that read an hour (epoch seconds of its start): usually one, two in the hours that windows share. */
export function nightsReading(hourS: number, timeZone: string): string[] {
  const around = localDate(hourS, timeZone)
  return [-1, 0, 1]
    .map((days) => nightWindow(addDays(around, days), timeZone))
    .filter((window) => hourS < window.readToS && hourS + HOUR_S > window.readFromS)
    .map((window) => window.date)
}

/**
 * Nights to run again because readings came late: those that ran for good before and read a marked hour. A provisional one needs no mark, for
 * its final run is to come.
 */
export function nightsToRepeat(input: {
  timeZone: string
  lateHoursS: readonly number[]
  runs: readonly KnownRun[]
}): string[] {
  const final = new Set(input.runs.filter((run) => !run.provisional).map((run) => run.localDate))
  const touched = new Set(input.lateHoursS.flatMap((hourS) => nightsReading(hourS, input.timeZone)))
  return [...touched].filter((date) => final.has(date)).sort()
}

/** Monday of the week that ended last before an instant: the one that a digest tells about. */
export function lastWholeWeek(nowS: number, timeZone: string): string {
  const today = localDate(nowS, timeZone)
  const weekday = (new Date(`${today}T00:00:00Z`).getUTCDay() + 6) % 7
  return addDays(today, -weekday - 7)
}

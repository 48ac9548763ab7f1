import { formatInTimeZone } from 'date-fns-tz'
import { addDays, localDate, localToEpochS } from '@/lib/time'

/** One tick of a time axis. `strong` marks midnight among hours and the newest day among days. */
export type TimeTick = { atS: number; label: string; strong: boolean }

const MINUTE = 60
const HOUR = 3600
const DAY = 86_400
const stepsS = [
  MINUTE,
  2 * MINUTE,
  5 * MINUTE,
  10 * MINUTE,
  15 * MINUTE,
  30 * MINUTE,
  HOUR,
  2 * HOUR,
  3 * HOUR,
  6 * HOUR,
  12 * HOUR,
  DAY,
  2 * DAY,
  7 * DAY,
  14 * DAY,
  28 * DAY,
  91 * DAY,
  182 * DAY,
  365 * DAY,
]

/**
 * Ticks of a time axis in a building's zone: at local hours that are multiples of the step, or at local midnights. Days of 23 and
 * 25 hours keep their ticks on the hour. At most `most` ticks; the smallest step that allows it is taken.
 */
export function timeTicks(fromS: number, toS: number, timeZone: string, most: number): TimeTick[] {
  if (!(toS > fromS) || most < 1) return []
  const stepS = stepsS.find((step) => (toS - fromS) / step <= most) ?? stepsS[stepsS.length - 1]!
  return stepS >= DAY ? dayTicks(fromS, toS, timeZone, stepS / DAY) : hourTicks(fromS, toS, timeZone, stepS)
}

function dayTicks(fromS: number, toS: number, timeZone: string, everyDays: number): TimeTick[] {
  const ticks: TimeTick[] = []
  let day = localDate(toS, timeZone)
  let atS = localToEpochS(day, '00:00', timeZone)
  while (atS >= fromS) {
    const pattern = everyDays < 7 ? 'EEE d' : everyDays < 182 ? 'd MMM' : 'MMM yyyy'
    const label = formatInTimeZone(new Date(atS * 1000), timeZone, pattern)
    ticks.unshift({ atS, label, strong: ticks.length === 0 && everyDays < 7 })
    day = addDays(day, -everyDays)
    atS = localToEpochS(day, '00:00', timeZone)
  }
  return ticks
}

function hourTicks(fromS: number, toS: number, timeZone: string, stepS: number): TimeTick[] {
  const ticks: TimeTick[] = []
  const lastDay = localDate(toS, timeZone)
  for (let day = localDate(fromS, timeZone); day <= lastDay; day = addDays(day, 1)) {
    for (let ofDayS = 0; ofDayS < DAY; ofDayS += stepS) {
      const clock = `${two(Math.floor(ofDayS / HOUR))}:${two(Math.floor((ofDayS % HOUR) / MINUTE))}`
      const atS = localToEpochS(day, clock, timeZone)
      const isNew = atS > (ticks[ticks.length - 1]?.atS ?? Number.NEGATIVE_INFINITY)
      if (isNew && atS >= fromS && atS <= toS) ticks.push({ atS, label: clock, strong: ofDayS === 0 })
    }
  }
  return ticks
}

const two = (value: number) => String(value).padStart(2, '0')

/** Ticks of a linear value axis: round steps that cover the range, at most `most`. */
export function valueTicks(low: number, high: number, most: number): number[] {
  const raw = (high - low) / Math.max(1, most)
  const power = 10 ** Math.floor(Math.log10(raw))
  const step = ([1, 2, 5, 10].find((times) => times * power >= raw) ?? 10) * power
  const first = Math.ceil(low / step - 1e-9)
  const last = Math.floor(high / step + 1e-9)
  return Array.from({ length: Math.max(0, last - first + 1) }, (_, i) =>
    Number(((first + i) * step).toPrecision(12)),
  )
}

/** Ticks of a logarithmic axis: 1, 2 and 5 of each power of ten inside the range. */
export function logTicks(low: number, high: number): number[] {
  const ticks: number[] = []
  for (let power = 10 ** Math.floor(Math.log10(low)); power <= high; power *= 10) {
    for (const times of [1, 2, 5])
      if (times * power >= low && times * power <= high) ticks.push(times * power)
  }
  return ticks
}

import { mannKendall, theilSen } from '@/lib/math/theil-sen'
import { nightsBetween } from '../nights'
import { dayNoise, type RateDay, withoutOddDays, withoutWeekendPattern } from './series'

/** A slow trend of a room's rate within one mode. */
export type RateDrift = {
  fromNight: string
  toNight: string
  /** rate at the end / rate at the start, with its 95 % interval */
  ratio: number
  ratioLow: number
  ratioHigh: number
  /** relative change in 30 days, e.g. −0.04 */
  perMonth: number
  /** two-sided p of the trend test, widened for correlated days */
  p: number
  days: number
  sentence: string
}

export type DriftOptions = {
  /** least days; default 20 */
  leastDays?: number
  /** largest p that counts as a trend; default 0.005, because every room is asked every night */
  p?: number
  /** trends smaller than this over the whole stretch, on ln(rate), are not reported; default 0.10 */
  leastChangeLn?: number
}

/**
 * Drift of one room's rate within ONE mode since its last step: Theil–Sen slope of ln(rate) on date, tested by Mann–Kendall with the
 * variance widened by (1 + φ)/(1 − φ) for days that resemble the day before.
 * @param days one entry per local day in order of date; pass only those since the last step
 * @returns null when there is no trend worth saying
 * @source Sen 1968, Mann 1945, Kendall 1975 (from memory)
 */
export function findRateDrift(days: readonly RateDay[], options: DriftOptions = {}): RateDrift | null {
  const first = days[0]
  const last = days.at(-1)
  if (!first || !last || days.length < (options.leastDays ?? 20)) return null
  const values = withoutOddDays(withoutWeekendPattern(days))
  const { correlation } = dayNoise(values)
  const inflation = (1 + correlation) / (1 - correlation)
  const x = days.map((day) => nightsBetween(first.night, day.night))
  const trend = theilSen(x, values, inflation)
  const { p } = mannKendall(values, inflation)
  const span = nightsBetween(first.night, last.night)
  const changeLn = trend.slope * span
  if (p > (options.p ?? 0.005) || Math.abs(changeLn) < (options.leastChangeLn ?? 0.1)) return null
  const perMonth = Math.expm1(trend.slope * 30)
  const percent = Math.round(Math.abs(perMonth) * 100)
  return {
    fromNight: first.night,
    toNight: last.night,
    ratio: Math.exp(changeLn),
    ratioLow: Math.exp(trend.low * span),
    ratioHigh: Math.exp(trend.high * span),
    perMonth,
    p,
    days: days.length,
    sentence: `The air-change rate has been ${perMonth < 0 ? 'falling' : 'rising'} by about ${percent} % a month since ${first.night}.`,
  }
}

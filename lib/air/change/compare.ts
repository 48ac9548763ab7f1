import { studentTQuantile } from '@/lib/math/student-t'
import type { RateDay } from './series'

/** Rate after an intervention against the rate before it, within one mode. */
export type BeforeAfter = {
  beforePerHour: number
  afterPerHour: number
  /** after / before with its 95 % interval */
  ratio: number
  ratioLow: number
  ratioHigh: number
  daysBefore: number
  daysAfter: number
  /** whether the interval leaves no change out */
  proven: boolean
  sentence: string
}

const LEAST_DAYS = 3
/** Day-to-day sd of ln(rate) below this is not believed of a few days (engineering choice, as in combineDays). */
const LEAST_SD = 0.05

function summary(days: readonly RateDay[]) {
  const n = days.length
  const mean = days.reduce((sum, day) => sum + day.lnRate, 0) / n
  const variance = days.reduce((sum, day) => sum + (day.lnRate - mean) ** 2, 0) / (n - 1)
  return { n, mean, meanVariance: Math.max(variance, LEAST_SD ** 2) / n }
}

/**
 * Before/after comparison of one room in ONE mode, on ln(rate), with Welch's interval and a floor under the day-to-day scatter. Volume,
 * gain and background errors are common to both sides and cancel in the ratio.
 * @param settleNights nights after the intervention that belong to neither side (the day of the work itself always does)
 * @returns null below three days on either side
 * @source Welch 1947 (from memory)
 */
export function compareBeforeAfter(
  days: readonly RateDay[],
  interventionNight: string,
  settleNights: readonly string[] = [],
): BeforeAfter | null {
  const left = new Set([interventionNight, ...settleNights])
  const kept = days.filter((day) => !left.has(day.night))
  const beforeDays = kept.filter((day) => day.night < interventionNight)
  const afterDays = kept.filter((day) => day.night > interventionNight)
  if (beforeDays.length < LEAST_DAYS || afterDays.length < LEAST_DAYS) return null
  const before = summary(beforeDays)
  const after = summary(afterDays)
  const variance = before.meanVariance + after.meanVariance
  const dof =
    variance ** 2 / (before.meanVariance ** 2 / (before.n - 1) + after.meanVariance ** 2 / (after.n - 1))
  const half = studentTQuantile(0.975, dof) * Math.sqrt(variance)
  const difference = after.mean - before.mean
  const proven = Math.abs(difference) > half
  const percent = Math.round(Math.abs(Math.expm1(difference)) * 100)
  const direction = difference < 0 ? 'lower' : 'higher'
  return {
    beforePerHour: Math.exp(before.mean),
    afterPerHour: Math.exp(after.mean),
    ratio: Math.exp(difference),
    ratioLow: Math.exp(difference - half),
    ratioHigh: Math.exp(difference + half),
    daysBefore: before.n,
    daysAfter: after.n,
    proven,
    sentence: proven
      ? `After ${interventionNight} the air-change rate is ${percent} % ${direction} than before.`
      : `No change of the air-change rate is proven after ${interventionNight}.`,
  }
}

import { lagOneCorrelation } from '@/lib/math/autocorrelation'
import { hodgesLehmann } from '@/lib/math/hodges-lehmann'
import { NORMAL_975 } from '@/lib/math/normal'
import { median } from '@/lib/math/robust'
import { studentTQuantile } from '@/lib/math/student-t'
import { type DayRate, dayRates, type RoomEstimate } from './day-rates'

export type { DayRate, RoomEstimate } from './day-rates'
export { dayRates, isUsable } from './day-rates'

/** A rate in 1/h with its 95 % limits. `rate` is null where only a bound is known; an open end is null. */
export type RateInterval = {
  ratePerHour: number | null
  lowPerHour: number | null
  highPerHour: number | null
}

export type CombineMethod = 'signed-rank' | 'student-t' | 'few-days' | 'bounds'

export type CombinedRate = RateInterval & {
  /** local days with at least one usable decay */
  days: number
  decays: number
  method: CombineMethod
  /** standard deviation of ln(day's rate) from day to day; null below two days or with open bounds */
  betweenDaySdLn: number | null
  /** standard uncertainty of ln(rate) that no number of days averages away: background, sensor gain and what the caller adds */
  commonSdLn: number
  /** limits of ln(rate) from the days' scatter alone, before the common terms; infinite where open */
  scatterLn: { low: number; high: number }
}

export type CombineOptions = {
  /** relative standard uncertainty of the sensor's gain; it cancels where the background is the sensor's own. Default 0 */
  gainRelativeUncertainty?: number
  /** further relative standard uncertainties shared by all days (volume, outdoor fraction), for a figure built on the rate */
  commonRelativeUncertainties?: readonly number[]
  /** which rate to combine: the fitted one, or the outdoor range of coupled rooms. Default `total` */
  rate?: 'total' | 'outdoor'
}

/** Below three days the scatter cannot be learnt from them: this is assumed, worth two degrees of freedom (engineering choice). */
const ASSUMED_DAY_SCATTER = 0.15
const ASSUMED_DAY_SCATTER_DOF = 2
/** Smallest day-to-day scatter of ln(rate) believed of three to five days (engineering choice). */
const LEAST_DAY_SCATTER = 0.05

/** What no number of days removes: mixing is never complete and no gain quite straight (standard uncertainty of ln(rate), chosen). */
const LEAST_COMMON_SD = 0.01

/** Half-width on ln(rate) of a 95 % interval for the typical day, from fewer than six days. */
function smallSampleHalfWidth(days: readonly DayRate[], sd: number | null): number {
  const n = days.length
  const own = Math.sqrt(days.reduce((sum, day) => sum + day.ownSdLn ** 2, 0) / n)
  if (n >= 3) {
    const scatter = Math.max(sd ?? 0, own, LEAST_DAY_SCATTER)
    return (studentTQuantile(0.975, n - 1) * scatter) / Math.sqrt(n)
  }
  const dof = ASSUMED_DAY_SCATTER_DOF + n - 1
  const assumed = ASSUMED_DAY_SCATTER_DOF * (ASSUMED_DAY_SCATTER ** 2 + own ** 2)
  const variance = (assumed + (n - 1) * (sd ?? 0) ** 2) / dof
  return studentTQuantile(0.975, dof) * Math.sqrt(variance / n)
}

function standardDeviation(values: readonly number[]): number | null {
  if (values.length < 2 || !values.every(Number.isFinite)) return null
  const mean = values.reduce((sum, y) => sum + y, 0) / values.length
  return Math.sqrt(values.reduce((sum, y) => sum + (y - mean) ** 2, 0) / (values.length - 1))
}

/** From this many days on, days that resemble the day before widen the interval. */
const CORRELATION_MIN_DAYS = 8
const MOST_CORRELATION = 0.6

/** How much wider the interval of correlated days is than that of independent ones: √((1 + φ)/(1 − φ)), φ from the days, never below 1. */
function correlationWidening(values: readonly number[]): number {
  if (values.length < CORRELATION_MIN_DAYS || !values.every(Number.isFinite)) return 1
  const centre = median(values)
  const correlation = Math.min(MOST_CORRELATION, lagOneCorrelation(values.map((value) => value - centre)))
  return correlation > 0 ? Math.sqrt((1 + correlation) / (1 - correlation)) : 1
}

/** A limit moved away from the location by a factor; an open end stays open. */
const stretch = (location: number, limit: number, factor: number) =>
  Number.isFinite(location) ? location + factor * (limit - location) : limit

/** Location and scatter limits on ln(rate). A day known only within limits enters once with each, which is exact for monotone limits. */
function locate(days: readonly DayRate[], sd: number | null) {
  const lows = days.map((day) => day.lowLn)
  const highs = days.map((day) => day.highLn)
  const exact = days.every((day) => day.lowLn === day.highLn)
  if (days.length >= 6) {
    const below = hodgesLehmann(lows)
    const above = exact ? below : hodgesLehmann(highs)
    const settled = above.location - below.location < 0.02
    const widening = correlationWidening(lows)
    return {
      location: settled ? (below.location + above.location) / 2 : null,
      low: stretch(below.location, below.low!, widening),
      high: stretch(above.location, above.high!, widening),
      method: settled ? ('signed-rank' as const) : ('bounds' as const),
    }
  }
  if (!exact) {
    return { location: null, low: Math.min(...lows), high: Math.max(...highs), method: 'bounds' as const }
  }
  const location = lows.reduce((sum, y) => sum + y, 0) / lows.length
  const half = smallSampleHalfWidth(days, sd)
  const method = days.length >= 3 ? ('student-t' as const) : ('few-days' as const)
  return { location, low: location - half, high: location + half, method }
}

/** Moves a scatter limit out by the common terms, in quadrature on ln(rate). */
function widen(location: number | null, limit: number, commonSd: number, side: -1 | 1): number {
  if (location === null) return limit + side * NORMAL_975 * commonSd
  return location + side * Math.hypot(limit - location, NORMAL_975 * commonSd)
}

const rateOrNull = (ln: number | null) => (ln !== null && Number.isFinite(ln) ? Math.exp(ln) : null)

/**
 * Typical rate of the days, 1/h, with a 95 % interval, from the estimates of ONE mode. Several decays of a day are first combined
 * to that day. On ln(rate): six days and more by Hodges–Lehmann with the exact signed-rank interval, three to five by Student t
 * with a floor under the scatter, fewer with an assumed scatter. The day-to-day scatter stays in the interval. From eight days on,
 * days that resemble the day before widen it. Background, gain and the caller's common terms are added afterwards and never
 * averaged down. Days known only as bounds enter as bounds.
 * @returns null when no estimate can be used
 * @source Hodges & Lehmann 1963; GUM (JCGM 100) for the common terms; small-sample floors are engineering choices
 */
export function combineDays(
  estimates: readonly RoomEstimate[],
  options: CombineOptions = {},
): CombinedRate | null {
  const days = dayRates(estimates, options.rate ?? 'total')
  if (days.length === 0) return null
  const sd = standardDeviation(days.flatMap((day) => (day.lowLn === day.highLn ? [day.lowLn] : [])))
  const located = locate(days, sd)
  const backgroundSd = median(days.map((day) => day.backgroundSdLn))
  const commonSdLn = Math.hypot(
    LEAST_COMMON_SD,
    backgroundSd,
    options.gainRelativeUncertainty ?? 0,
    ...(options.commonRelativeUncertainties ?? []),
  )
  return {
    ratePerHour: rateOrNull(located.location),
    lowPerHour: rateOrNull(widen(located.location, located.low, commonSdLn, -1)),
    highPerHour: rateOrNull(widen(located.location, located.high, commonSdLn, 1)),
    days: days.length,
    decays: days.reduce((sum, day) => sum + day.decays, 0),
    method: located.method,
    betweenDaySdLn: sd,
    commonSdLn,
    scatterLn: { low: located.low, high: located.high },
  }
}

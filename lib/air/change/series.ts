import { median } from '@/lib/math/robust'
import { isoWeekday } from '@/lib/time'

/** One local day of one room in one mode: its date and ln of its rate (1/h). */
export type RateDay = { night: string; lnRate: number }

/** Day-to-day noise of ln(rate): its sd, the correlation of one day with the next, and the variance a mean of many days sees. */
export type DayNoise = { sd: number; correlation: number; longRunVariance: number }

/** Noise below this is not believed of a rate from day to day (engineering choice). */
const LEAST_SD = 0.03
const LEAST_WEEKEND_DAYS = 4

const isWeekend = (night: string) => isoWeekday(night) >= 6

/**
 * Takes the usual difference between weekend and working days out of the series, so that a mixture of the two is not read as a change:
 * the median difference of each weekend day from the working days nearest to it.
 */
export function withoutWeekendPattern(days: readonly RateDay[]): number[] {
  const differences: number[] = []
  days.forEach((day, i) => {
    if (!isWeekend(day.night)) return
    const near = days.slice(Math.max(0, i - 5), i + 6).filter((other) => !isWeekend(other.night))
    if (near.length >= 3) differences.push(day.lnRate - median(near.map((other) => other.lnRate)))
  })
  const shift = differences.length >= LEAST_WEEKEND_DAYS ? median(differences) : 0
  return days.map((day) => (isWeekend(day.night) ? day.lnRate - shift : day.lnRate))
}

/** Pulls single odd days back to three sd from the running median of seven; steps stay where they are. */
export function withoutOddDays(values: readonly number[]): number[] {
  const running = values.map((_, i) => median(values.slice(Math.max(0, i - 3), i + 4)))
  const residuals = values.map((value, i) => Math.abs(value - running[i]!))
  const reach = 3 * Math.max(LEAST_SD, 1.4826 * median(residuals))
  return values.map((value, i) => Math.min(running[i]! + reach, Math.max(running[i]! - reach, value)))
}

/** sd of single values from the median absolute difference of values `lag` apart; a step spoils only `lag` of the differences. */
function sdFromDifferences(values: readonly number[], lags: readonly number[]): number {
  const differences = lags.flatMap((lag) => values.slice(lag).map((value, i) => Math.abs(value - values[i]!)))
  return differences.length === 0 ? 0 : (1.4826 * median(differences)) / Math.SQRT2
}

/** sd about the running median of fifteen: it follows steps, and odd nights that keep coming count in full. */
function sdAboutRunningMedian(values: readonly number[]): number {
  const squares = values.map((value, i) => (value - median(values.slice(Math.max(0, i - 7), i + 8))) ** 2)
  return Math.sqrt(squares.reduce((sum, square) => sum + square, 0) / Math.max(1, values.length - 1))
}

/** Lags over which a day no longer resembles another; short series cannot spare so many differences to one step. */
const farLags = (n: number) => (n >= 28 ? [5, 6, 7] : [2, 3])

/**
 * Day-to-day noise that steps and drift hardly touch: sd from differences of far days or about the running median, whichever is larger;
 * correlation from how much smaller the differences of neighbouring days are (1 − φ = their ratio squared).
 */
export function dayNoise(values: readonly number[]): DayNoise {
  const near = sdFromDifferences(values, [1])
  const far = sdFromDifferences(values, farLags(values.length))
  const correlation = far > near ? Math.min(0.8, 1 - (near / far) ** 2) : 0
  const sd = Math.max(LEAST_SD, near, far, sdAboutRunningMedian(values))
  return { sd, correlation, longRunVariance: (sd ** 2 * (1 + correlation)) / (1 - correlation) }
}

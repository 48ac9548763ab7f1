/**
 * The classical estimators of a tracer decay, as E741 and ISO 12569 describe them (clauses from memory): for comparison and for the checks. The
 * analysis itself fits ppm, see piecewise.ts, because logarithms weigh the noisy tail too much and give no honest interval.
 */
import { lagOneCorrelation } from '@/lib/math/autocorrelation'

/** Rate (1/h) from two levels: ln(E1 / E2) / T. NaN when an excess is not positive. */
export function twoPointRate(
  firstPpm: number,
  lastPpm: number,
  backgroundPpm: number,
  hours: number,
): number {
  const ratio = (firstPpm - backgroundPpm) / (lastPpm - backgroundPpm)
  return ratio > 0 && firstPpm > backgroundPpm ? Math.log(ratio) / hours : Number.NaN
}

/** Rate (1/h) and final level (ppm) from three equally spaced levels; serves decay and build-up alike, and needs no background. */
export function threePointRate(
  c1: number,
  c2: number,
  c3: number,
  stepHours: number,
): { ratePerHour: number; finalPpm: number } {
  const ratio = (c3 - c2) / (c2 - c1)
  return {
    ratePerHour: ratio > 0 ? -Math.log(ratio) / stepHours : Number.NaN,
    finalPpm: (c1 * c3 - c2 * c2) / (c1 + c3 - 2 * c2),
  }
}

export type LogLine = {
  ratePerHour: number
  standardErrorPerHour: number
  startExcessPpm: number
  /** residual standard deviation of ln E */
  residualSd: number
  rSquared: number
  durbinWatson: number
  lagOne: number
  residuals: Float64Array
}

/**
 * Straight line through ln(C - B) by (weighted) least squares; the ordinary standard error. Readings at or below the background have no logarithm
 * and make this throw: they must be cut off before, never dropped silently.
 */
export function logLine(
  timeH: ArrayLike<number>,
  ppm: ArrayLike<number>,
  backgroundPpm: number,
  weightByExcess = false,
): LogLine {
  const n = timeH.length
  if (n < 3) throw new RangeError('a line needs at least three readings')
  const y = Float64Array.from({ length: n }, (_, i) => Math.log(ppm[i]! - backgroundPpm))
  if (!y.every(Number.isFinite)) throw new RangeError('a reading lies at or below the background')
  const w = Float64Array.from({ length: n }, (_, i) => (weightByExcess ? (ppm[i]! - backgroundPpm) ** 2 : 1))
  let sw = 0
  let st = 0
  let sy = 0
  for (let i = 0; i < n; i++) {
    sw += w[i]!
    st += w[i]! * timeH[i]!
    sy += w[i]! * y[i]!
  }
  const tm = st / sw
  const ym = sy / sw
  let sxx = 0
  let sxy = 0
  let syy = 0
  for (let i = 0; i < n; i++) {
    sxx += w[i]! * (timeH[i]! - tm) ** 2
    sxy += w[i]! * (timeH[i]! - tm) * (y[i]! - ym)
    syy += w[i]! * (y[i]! - ym) ** 2
  }
  const slope = sxy / sxx
  const residuals = y.map((value, i) => value - ym - slope * (timeH[i]! - tm))
  let sse = 0
  let steps = 0
  let plain = 0
  for (let i = 0; i < n; i++) {
    sse += w[i]! * residuals[i]! ** 2
    plain += residuals[i]! ** 2
    if (i > 0) steps += (residuals[i]! - residuals[i - 1]!) ** 2
  }
  const residualSd = Math.sqrt(sse / (n - 2))
  return {
    ratePerHour: -slope,
    standardErrorPerHour: residualSd / Math.sqrt(sxx),
    startExcessPpm: Math.exp(ym + slope * (timeH[0]! - tm)),
    residualSd,
    rSquared: 1 - sse / syy,
    durbinWatson: steps / plain,
    lagOne: lagOneCorrelation(residuals),
    residuals,
  }
}

/** First-order relative error of the rate when the background is `deltaPpm` too high, for a log-linear fit over x time constants. */
export function backgroundBias(deltaPpm: number, startExcessPpm: number, x: number): number {
  return (deltaPpm / startExcessPpm) * (12 / (x * x)) * ((Math.exp(x) + 1) / 2 - (Math.exp(x) - 1) / x)
}

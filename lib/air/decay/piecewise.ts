/**
 * The decay of an empty well-mixed room whose air-change rate is constant between breaks:
 *   C(t) = B + E0 exp(-integral of A),  A = A_1 before the first break, A_2 after it, …
 * continuous, because the air in the room cannot jump. Fitted to readings in ppm (not to their logarithm) by Gauss-Newton with analytic
 * derivatives; the background B is an unknown with a prior N(B0, uB), so its uncertainty reaches the rates.
 */
import { invertSymmetric } from '@/lib/math/linear'

/** Binned readings: time in hours from the window's origin, mean ppm, standard deviation of that mean. */
export type Binned = { timeH: Float64Array; ppm: Float64Array; sdPpm: Float64Array }
export type Prior = { ppm: number; sdPpm: number }

export type PiecewiseFit = {
  breaksH: number[]
  fromH: number
  logStartExcess: number
  ratesPerHour: number[]
  backgroundPpm: number
  /** weighted sum of squares with the prior's term */
  chiSquared: number
  /** covariance of [ln E0, A_1 … A_K, B] for unit weight, row by row */
  covariance: Float64Array
  points: number
  /** (reading - model) / sd for each bin */
  residuals: Float64Array
}

/** Hours spent in segment k up to time t. */
function fillDurations(t: number, fromH: number, breaksH: readonly number[], into: Float64Array): void {
  let start = fromH
  for (let k = 0; k <= breaksH.length; k++) {
    const end = k < breaksH.length ? breaksH[k]! : Number.POSITIVE_INFINITY
    into[k] = t <= start ? 0 : Math.min(t, end) - start
    start = end
  }
}

/** Model value in ppm at time t (hours). */
export function piecewiseValue(fit: PiecewiseFit, timeH: number): number {
  const durations = new Float64Array(fit.breaksH.length + 1)
  fillDurations(timeH, fit.fromH, fit.breaksH, durations)
  if (timeH < fit.fromH) durations[0] = timeH - fit.fromH
  let exponent = fit.logStartExcess
  for (let k = 0; k < durations.length; k++) exponent -= fit.ratesPerHour[k]! * durations[k]!
  return fit.backgroundPpm + Math.exp(exponent)
}

type Work = { normal: Float64Array; gradient: Float64Array; residuals: Float64Array; chiSquared: number }

/** One pass over the readings: residuals, normal matrix and gradient at the parameters. */
function accumulate(
  data: Binned,
  fromH: number,
  breaksH: readonly number[],
  p: Float64Array,
  prior: Prior | null,
  work: Work,
): void {
  const rates = breaksH.length + 1
  const size = rates + 2
  const { normal, gradient, residuals } = work
  normal.fill(0)
  gradient.fill(0)
  const durations = new Float64Array(rates)
  const row = new Float64Array(size)
  const background = p[size - 1]!
  let chi = 0
  for (let i = 0; i < data.timeH.length; i++) {
    fillDurations(data.timeH[i]!, fromH, breaksH, durations)
    let exponent = p[0]!
    for (let k = 0; k < rates; k++) exponent -= p[k + 1]! * durations[k]!
    const weight = 1 / data.sdPpm[i]!
    const excess = Math.exp(Math.min(exponent, 12))
    const residual = (data.ppm[i]! - background - excess) * weight
    residuals[i] = residual
    chi += residual * residual
    row[0] = excess * weight
    for (let k = 0; k < rates; k++) row[k + 1] = -excess * durations[k]! * weight
    row[size - 1] = weight
    for (let a = 0; a < size; a++) {
      const ra = row[a]!
      if (ra === 0) continue
      gradient[a]! += ra * residual
      for (let b = 0; b <= a; b++) normal[a * size + b]! += ra * row[b]!
    }
  }
  if (prior) {
    const weight = 1 / prior.sdPpm
    const residual = (prior.ppm - background) * weight
    chi += residual * residual
    gradient[size - 1]! += weight * residual
    normal[size * size - 1]! += weight * weight
  }
  for (let a = 0; a < size; a++)
    for (let b = a + 1; b < size; b++) normal[a * size + b] = normal[b * size + a]!
  work.chiSquared = chi
}

function step(work: Work, size: number, damping: number): Float64Array | null {
  const damped = Float64Array.from(work.normal)
  for (let a = 0; a < size; a++) damped[a * size + a]! *= 1 + damping
  const inverse = invertSymmetric(damped, size)
  if (!inverse) return null
  const move = new Float64Array(size)
  for (let a = 0; a < size; a++)
    for (let b = 0; b < size; b++) move[a]! += inverse[a * size + b]! * work.gradient[b]!
  return move
}

export type Start = { logStartExcess: number; ratesPerHour: readonly number[]; backgroundPpm: number }

/**
 * Fits the rates between the given breaks. `prior` null leaves the background free. Returns null when there are fewer readings than
 * unknowns or the normal matrix is singular (the readings do not determine the rates).
 */
export function fitPiecewise(
  data: Binned,
  fromH: number,
  breaksH: readonly number[],
  prior: Prior | null,
  start: Start,
  iterations = 25,
): PiecewiseFit | null {
  const n = data.timeH.length
  const size = breaksH.length + 3
  if (n + (prior ? 1 : 0) < size) return null
  let p = Float64Array.from([start.logStartExcess, ...start.ratesPerHour, start.backgroundPpm])
  let work: Work = blankWork(size, n)
  let trial: Work = blankWork(size, n)
  accumulate(data, fromH, breaksH, p, prior, work)
  let damping = 1e-4
  for (let i = 0; i < iterations; i++) {
    const move = step(work, size, damping)
    if (!move) {
      damping = Math.max(1e-3, damping * 30)
      if (damping > 1e6) return null
      continue
    }
    const next = p.map((value, a) => value + move[a]!)
    accumulate(data, fromH, breaksH, next, prior, trial)
    if (!(trial.chiSquared <= work.chiSquared)) {
      damping = Math.max(1e-3, damping * 10)
      if (damping > 1e8) break
      continue
    }
    const gain = work.chiSquared - trial.chiSquared
    p = next
    ;[work, trial] = [trial, work]
    damping = damping < 1e-7 ? 0 : damping / 10
    if (gain < 1e-7 * (1 + work.chiSquared)) break
  }
  const covariance = invertSymmetric(work.normal, size)
  if (!covariance) return null
  return {
    breaksH: [...breaksH],
    fromH,
    logStartExcess: p[0]!,
    ratesPerHour: Array.from(p.subarray(1, size - 1)),
    backgroundPpm: p[size - 1]!,
    chiSquared: work.chiSquared,
    covariance,
    points: n,
    residuals: Float64Array.from(work.residuals),
  }
}

function blankWork(size: number, n: number): Work {
  return {
    normal: new Float64Array(size * size),
    gradient: new Float64Array(size),
    residuals: new Float64Array(n),
    chiSquared: Number.POSITIVE_INFINITY,
  }
}

/** A starting point from the readings themselves: ends of the window above the prior background. */
export function roughStart(data: Binned, backgroundPpm: number): Start {
  const n = data.timeH.length
  const edge = Math.max(1, Math.min(5, Math.floor(n / 6)))
  let first = 0
  for (let i = 0; i < edge; i++) first += data.ppm[i]! / edge
  const startExcess = Math.max(5, first - backgroundPpm)
  let k = n - 1
  for (let i = 1; i < n; i++) {
    if (data.ppm[i]! - backgroundPpm < 0.4 * startExcess) {
      k = i
      break
    }
  }
  const excess = Math.max(0.02 * startExcess, data.ppm[k]! - backgroundPpm)
  const duration = Math.max(1e-3, data.timeH[k]! - data.timeH[0]!)
  const rate = Math.max(0.01, Math.log(startExcess / excess) / duration)
  return { logStartExcess: Math.log(startExcess), ratesPerHour: [rate], backgroundPpm }
}

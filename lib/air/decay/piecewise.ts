/**
 * The decay of an empty well-mixed room whose air-change rate is constant between breaks:
 *   C(t) = B + D t + E0 exp(-integral of A),  A = A_1 before the first break, A_2 after it, …
 * continuous, because the air in the room cannot jump. Fitted to readings in ppm (not to their logarithm) by Gauss-Newton with analytic
 * derivatives. The background B and its slope D are unknowns with priors N(B0, uB) and N(0, uD), for outdoor air and a sensor's zero move over
 * an evening; so what is not known of them reaches the rates.
 */
import { invertSymmetric, solveSymmetric } from '@/lib/math/linear'

/** Binned readings: time in hours from the window's origin, mean ppm, standard deviation of that mean. */
export type Binned = { timeH: Float64Array; ppm: Float64Array; sdPpm: Float64Array }
export type Prior = { ppm: number; sdPpm: number; driftSdPpmPerHour?: number }

export type PiecewiseFit = {
  breaksH: number[]
  fromH: number
  logStartExcess: number
  ratesPerHour: number[]
  /** background at the origin of time, and its slope */
  backgroundPpm: number
  driftPpmPerHour: number
  /** weighted sum of squares with the priors' terms */
  chiSquared: number
  /** covariance of [ln E0, A_1 … A_K, B, D] for unit weight, row by row */
  covariance: Float64Array
  points: number
  /** (reading - model) / sd for each bin */
  residuals: Float64Array
}

export type Start = {
  logStartExcess: number
  ratesPerHour: readonly number[]
  backgroundPpm: number
  driftPpmPerHour?: number
}

/** Spread of the drift where none is allowed, ppm per hour. */
const STILL = 1e-5
/** Excess is kept below this power of e, so that a wild step stays finite. */
const LARGEST_EXPONENT = 12

/** Model value in ppm at time t (hours); before the window the first rate is carried back. */
export function piecewiseValue(fit: PiecewiseFit, timeH: number): number {
  return backgroundAt(fit, timeH) + piecewiseExcess(fit, timeH)
}

/** Excess over the background at time t (hours), ppm. */
export function piecewiseExcess(fit: PiecewiseFit, timeH: number): number {
  let exponent = fit.logStartExcess
  let start = fit.fromH
  if (timeH < start) return Math.exp(exponent + fit.ratesPerHour[0]! * (start - timeH))
  for (let k = 0; k < fit.ratesPerHour.length; k++) {
    const end = fit.breaksH[k] ?? Number.POSITIVE_INFINITY
    if (timeH <= start) break
    exponent -= fit.ratesPerHour[k]! * (Math.min(timeH, end) - start)
    start = end
  }
  return Math.exp(exponent)
}

/** The background of a fit at an instant (hours from the origin), ppm. */
export function backgroundAt(fit: PiecewiseFit, timeH: number): number {
  return fit.backgroundPpm + fit.driftPpmPerHour * timeH
}

/** The parameters of a fit as a starting point for another. */
export function startFrom(fit: PiecewiseFit): Start {
  const { logStartExcess, ratesPerHour, backgroundPpm, driftPpmPerHour } = fit
  return { logStartExcess, ratesPerHour, backgroundPpm, driftPpmPerHour }
}

type Work = {
  normal: Float64Array
  gradient: Float64Array
  residuals: Float64Array
  row: Float64Array
  chiSquared: number
}

function blankWork(size: number, n: number): Work {
  return {
    normal: new Float64Array(size * size),
    gradient: new Float64Array(size),
    residuals: new Float64Array(n),
    row: new Float64Array(size),
    chiSquared: Number.POSITIVE_INFINITY,
  }
}

/** One pass over the readings: residuals, normal matrix and gradient at the parameters. Written out flat: it is nearly all of the time. */
function accumulate(
  data: Binned,
  edges: Float64Array,
  p: Float64Array,
  prior: Prior | null,
  work: Work,
): void {
  const size = p.length
  const rates = size - 3
  const b = size - 2
  const d = size - 1
  const { normal, gradient, residuals, row } = work
  const { timeH, ppm, sdPpm } = data
  normal.fill(0)
  gradient.fill(0)
  let chi = 0
  for (let i = 0; i < timeH.length; i++) {
    const t = timeH[i]!
    const weight = 1 / sdPpm[i]!
    let exponent = p[0]!
    let reached = 1
    for (let k = 0; k < rates; k++) {
      const start = edges[k]!
      if (t <= start && k > 0) break
      const spent = Math.min(t, edges[k + 1]!) - start
      row[k + 1] = spent
      exponent -= p[k + 1]! * spent
      reached = k + 1
    }
    const excess = Math.exp(Math.min(exponent, LARGEST_EXPONENT))
    const residual = (ppm[i]! - p[b]! - p[d]! * t - excess) * weight
    residuals[i] = residual
    chi += residual * residual
    const weighted = excess * weight
    row[0] = weighted
    for (let k = 1; k <= reached; k++) row[k]! *= -weighted
    // rates not reached yet have no derivative: only the first `reached` of them enter
    for (let a = 0; a <= reached; a++) {
      const ra = row[a]!
      gradient[a]! += ra * residual
      const line = a * size
      for (let c = 0; c <= a; c++) normal[line + c]! += ra * row[c]!
      normal[b * size + a]! += weight * ra
      normal[d * size + a]! += weight * t * ra
    }
    const square = weight * weight
    gradient[b]! += weight * residual
    gradient[d]! += weight * t * residual
    normal[b * size + b]! += square
    normal[d * size + b]! += square * t
    normal[d * size + d]! += square * t * t
  }
  if (prior) chi += pull(work, b, size, prior.ppm - p[b]!, prior.sdPpm)
  chi += pull(work, d, size, -p[d]!, prior?.driftSdPpmPerHour ?? STILL)
  for (let i = 0; i < size; i++)
    for (let j = i + 1; j < size; j++) normal[i * size + j] = normal[j * size + i]!
  work.chiSquared = chi
}

/** Adds a prior on one unknown; returns its share of chi squared. */
function pull(work: Work, index: number, size: number, distance: number, sd: number): number {
  const weight = 1 / (sd * sd)
  work.gradient[index]! += weight * distance
  work.normal[index * size + index]! += weight
  return weight * distance * distance
}

function moveFrom(work: Work, size: number, damping: number): Float64Array | null {
  const damped = work.normal.slice()
  for (let a = 0; a < size; a++) damped[a * size + a]! *= 1 + damping
  const move = work.gradient.slice()
  return solveSymmetric(damped, move, size) ? move : null
}

/** Gauss-Newton with Levenberg's damping; returns the parameters and the pass made at them, or null when nothing is determined. */
function solve(
  data: Binned,
  edges: Float64Array,
  first: Float64Array,
  prior: Prior | null,
  iterations: number,
  tolerance: number,
) {
  const size = first.length
  let p = first
  let work = blankWork(size, data.timeH.length)
  let trial = blankWork(size, data.timeH.length)
  accumulate(data, edges, p, prior, work)
  let damping = 1e-4
  for (let i = 0; i < iterations; i++) {
    const move = moveFrom(work, size, damping)
    if (!move) {
      damping = Math.max(1e-3, damping * 30)
      if (damping > 1e6) return null
      continue
    }
    const next = move
    for (let a = 0; a < size; a++) next[a]! += p[a]!
    accumulate(data, edges, next, prior, trial)
    if (!(trial.chiSquared <= work.chiSquared)) {
      damping = Math.max(1e-3, damping * 10)
      if (damping > 1e8) break
      continue
    }
    const gain = work.chiSquared - trial.chiSquared
    p = next
    const spare = work
    work = trial
    trial = spare
    damping = damping < 1e-7 ? 0 : damping / 10
    if (gain < tolerance * (1 + work.chiSquared)) break
  }
  return { p, work }
}

/**
 * Fits the rates between the given breaks. `prior` null leaves the background free and still. Returns null when there are fewer readings than
 * unknowns or the normal matrix is singular (the readings do not determine the rates). `tolerance` is the relative gain in chi squared that ends it.
 */
export function fitPiecewise(
  data: Binned,
  fromH: number,
  breaksH: readonly number[],
  prior: Prior | null,
  start: Start,
  iterations = 25,
  tolerance = 1e-6,
): PiecewiseFit | null {
  const n = data.timeH.length
  const size = breaksH.length + 4
  if (n + (prior ? 1 : 0) < size - 1) return null
  const first = Float64Array.from([
    start.logStartExcess,
    ...start.ratesPerHour,
    start.backgroundPpm,
    start.driftPpmPerHour ?? 0,
  ])
  const edges = Float64Array.from([fromH, ...breaksH, Number.POSITIVE_INFINITY])
  const solved = solve(data, edges, first, prior, iterations, tolerance)
  if (!solved) return null
  const { p, work } = solved
  const covariance = invertSymmetric(work.normal, size)
  if (!covariance) return null
  return {
    breaksH: [...breaksH],
    fromH,
    logStartExcess: p[0]!,
    ratesPerHour: Array.from(p.subarray(1, size - 2)),
    backgroundPpm: p[size - 2]!,
    driftPpmPerHour: p[size - 1]!,
    chiSquared: work.chiSquared,
    covariance,
    points: n,
    residuals: work.residuals,
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

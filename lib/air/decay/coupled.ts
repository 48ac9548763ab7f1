/**
 * A room whose air comes partly from a neighbour that is measured:
 *   dC/dt = n ((1 - f) B + f N(t) - C)
 * n is the rate at which lower-CO2 air replaces the room's air, f the neighbour's share, so that n (1 - f) comes from outdoors. Above the
 * background the room's excess is E0 u(t) + f v(t), u = exp(-n t), v the neighbour's excess seen through a first-order filter of rate n.
 */
import { leastSquares } from '@/lib/math/least-squares'
import { t95 } from '@/lib/math/student-t'
import { type CleanRecord, indexAt } from './clean'
import type { Track } from './falls'
import { longRunScale } from './noise'
import type { Binned, PiecewiseFit, Prior } from './piecewise'

/** The neighbour's level above its own background. */
export type Neighbour = { track: Track; backgroundPpm: number; sdPpm: number }

export type CoupledFit = {
  ratePerHour: number
  lowPerHour: number
  highPerHour: number
  outdoorLowPerHour: number
  outdoorHighPerHour: number
  share: number
  shareSd: number
  regression: number
  /** see RateEstimate */
  misfit: number
}

/** The neighbour's excess at an instant, linear between its readings; null outside them. */
export function neighbourExcess({ track, backgroundPpm }: Neighbour, timeS: number): number | null {
  const i = indexAt(track.timeS, timeS)
  if (i === 0 || i >= track.timeS.length) return null
  const before = track.timeS[i - 1]!
  const gap = track.timeS[i]! - before
  if (gap > 5400) return null
  const level = track.ppm[i - 1]! + ((timeS - before) / gap) * (track.ppm[i]! - track.ppm[i - 1]!)
  return level - backgroundPpm
}

/** The neighbour's excess filtered at a rate (1/h), from zero at the first instant; times in hours. */
export function filtered(
  timeH: ArrayLike<number>,
  excess: ArrayLike<number>,
  ratePerHour: number,
  out: Float64Array,
): void {
  out[0] = 0
  for (let i = 1; i < timeH.length; i++) {
    const keep = Math.exp(-ratePerHour * (timeH[i]! - timeH[i - 1]!))
    out[i] = out[i - 1]! * keep + (1 - keep) * 0.5 * (excess[i]! + excess[i - 1]!)
  }
}

function excessAt(neighbour: Neighbour, data: Binned, originS: number): Float64Array | null {
  const values = new Float64Array(data.timeH.length)
  for (let i = 0; i < values.length; i++) {
    const excess = neighbourExcess(neighbour, originS + data.timeH[i]! * 3600)
    if (excess === null) return null
    values[i] = excess
  }
  return values
}

function solveCoupled(data: Binned, excess: Float64Array, prior: Prior, rateStart: number) {
  const n = data.timeH.length
  const t0 = data.timeH[0]!
  const through = new Float64Array(n)
  return leastSquares({
    count: n + 3,
    start: [Math.max(20, data.ppm[0]! - prior.ppm), Math.log(Math.max(0.05, rateStart)), 0.3, 0, 0],
    iterations: 30,
    residuals: (p, out) => {
      const rate = Math.exp(Math.min(4.5, p[1]!))
      filtered(data.timeH, excess, rate, through)
      for (let i = 0; i < n; i++) {
        const room = p[0]! * Math.exp(-rate * (data.timeH[i]! - t0)) + p[2]! * through[i]!
        out[i] = (data.ppm[i]! - prior.ppm - p[3]! - p[4]! * data.timeH[i]! - room) / data.sdPpm[i]!
      }
      out[n] = p[3]! / prior.sdPpm
      out[n + 1] = p[4]! / (prior.driftSdPpmPerHour ?? 1e-5)
      // a share lies between none and all; the walls are soft
      out[n + 2] = p[2]! < 0 ? p[2]! / 0.03 : p[2]! > 1 ? (p[2]! - 1) / 0.03 : 0
    },
  })
}

/** Fits one window of a coupled room. Null when the neighbour's record does not cover it or nothing is determined. */
export function fitCoupled(
  data: Binned,
  neighbour: Neighbour,
  prior: Prior,
  originS: number,
  like: { fit: PiecewiseFit | null; ratePerHour: number },
): CoupledFit | null {
  const excess = excessAt(neighbour, data, originS)
  if (!excess || data.timeH.length < 7) return null
  const wide = { ...prior, sdPpm: Math.hypot(prior.sdPpm, 0.5 * neighbour.sdPpm) }
  const solution = solveCoupled(data, excess, wide, like.ratePerHour)
  if (!solution) return null
  const [, logRate, share] = solution.parameters as unknown as [number, number, number]
  const at = (i: number, j: number) => solution.covariance[i * 5 + j]!
  const blank = { ratesPerHour: [0], breaksH: [], residuals: solution.residuals } as unknown as PiecewiseFit
  const scale = longRunScale(like.fit ? { ...like.fit, residuals: solution.residuals } : blank, data)
  const rate = Math.exp(logRate)
  const factor = t95(scale.degreesOfFreedom)
  const regression = Math.sqrt(at(1, 1) * scale.variance)
  const half = factor * Math.hypot(regression, COUPLED_MODEL)
  const outdoor = rate * (1 - share)
  const outdoorVariance = rate * rate * ((1 - share) ** 2 * at(1, 1) - 2 * (1 - share) * at(1, 2) + at(2, 2))
  const outdoorHalf =
    factor * Math.hypot(Math.sqrt(Math.max(0, outdoorVariance) * scale.variance), COUPLED_MODEL * rate)
  return {
    ratePerHour: rate,
    lowPerHour: rate * Math.exp(-half),
    highPerHour: rate * Math.exp(half),
    outdoorLowPerHour: Math.max(0, outdoor - outdoorHalf),
    outdoorHighPerHour: Math.max(0.01, outdoor + outdoorHalf),
    share,
    shareSd: Math.sqrt(at(2, 2) * scale.variance),
    regression,
    misfit: scale.variance,
  }
}

/** Standard uncertainty of ln n from what the two-zone model leaves out (chosen; checked by the coverage suites). */
const COUPLED_MODEL = 0.02

/** A record without what the neighbour brought since `fromS`: what is left ebbs at n towards the background. */
export function decoupledRecord(
  record: CleanRecord,
  neighbour: Neighbour,
  fromS: number,
  toS: number,
  fit: CoupledFit,
): CleanRecord {
  const first = indexAt(record.timeS, fromS)
  const last = indexAt(record.timeS, toS)
  const timeH = Float64Array.from(record.timeS.subarray(first, last), (t) => (t - fromS) / 3600)
  const excess = Float64Array.from(timeH, (t) => neighbourExcess(neighbour, fromS + t * 3600) ?? 0)
  const through = new Float64Array(timeH.length)
  if (timeH.length > 0) filtered(timeH, excess, fit.ratePerHour, through)
  const ppm = Float64Array.from(record.ppm)
  for (let i = 0; i < through.length; i++) ppm[first + i]! -= fit.share * through[i]!
  return { ...record, ppm }
}

/**
 * Demand control: the rate follows CO2, A = A0 + k E, so that the decay slows down smoothly as the level falls:
 *   E(t) = A0 E0 exp(-A0 t) / (A0 + k E0 (1 - exp(-A0 t)))     (Bernoulli's equation, closed form)
 * One number would speak for no moment of it: what is given is the rate at the occupied end, A0 + k E0, as a range.
 */

import { leastSquares } from '@/lib/math/least-squares'
import { t95 } from '@/lib/math/student-t'
import { longRunScale } from './noise'
import type { Binned, PiecewiseFit, Prior } from './piecewise'

export type DemandFit = {
  chiSquared: number
  startExcessPpm: number
  /** A0 + k E0 and A0 + k E at the end, 1/h */
  startRatePerHour: number
  endRatePerHour: number
  startLowPerHour: number
  startHighPerHour: number
  backgroundPpm: number
  /** rate after so many hours */
  rateAfter: (hours: number) => number
}

/** Excess after t hours under demand control; `extraRate` is k E0, all rates 1/h. */
export function demandExcess(t: number, startExcessPpm: number, baseRate: number, extraRate: number): number {
  const left = Math.exp(-baseRate * t)
  // the limit for no base rate is a hyperbola
  if (Math.abs(baseRate) < 1e-6) return startExcessPpm / (1 + extraRate * t)
  return (baseRate * startExcessPpm * left) / (baseRate + extraRate * (1 - left))
}

/** Fits demand control to a window. Null when nothing is determined or the rate does not grow with CO2. */
export function fitDemand(data: Binned, prior: Prior, like: PiecewiseFit): DemandFit | null {
  const n = data.timeH.length
  const t0 = data.timeH[0]!
  const slow = Math.max(0.05, like.ratesPerHour[like.ratesPerHour.length - 1]!)
  const fast = Math.max(slow * 1.5, like.ratesPerHour[0]!)
  const solution = leastSquares({
    count: n + 2,
    start: [like.logStartExcess, Math.log(slow), Math.log(fast - slow), 0, 0],
    iterations: 40,
    residuals: (p, out) => {
      const start = Math.exp(p[0]!)
      const base = Math.exp(Math.min(4, p[1]!))
      const extra = Math.exp(Math.min(4, p[2]!))
      for (let i = 0; i < n; i++) {
        const excess = demandExcess(data.timeH[i]! - t0, start, base, extra)
        out[i] = (data.ppm[i]! - prior.ppm - p[3]! - p[4]! * data.timeH[i]! - excess) / data.sdPpm[i]!
      }
      out[n] = p[3]! / prior.sdPpm
      out[n + 1] = p[4]! / (prior.driftSdPpmPerHour ?? 1e-5)
    },
  })
  return solution ? describeDemand(data, prior, like, solution) : null
}

function describeDemand(
  data: Binned,
  prior: Prior,
  like: PiecewiseFit,
  solution: NonNullable<ReturnType<typeof leastSquares>>,
): DemandFit {
  const [logStart, logBase, logExtra, shift] = solution.parameters as unknown as [
    number,
    number,
    number,
    number,
  ]
  const base = Math.exp(logBase)
  const extra = Math.exp(logExtra)
  const startRate = base + extra
  const start = Math.exp(logStart)
  const hours = data.timeH[data.timeH.length - 1]! - data.timeH[0]!
  const left = demandExcess(hours, start, base, extra) / start
  const at = (i: number, j: number) => solution.covariance[i * 5 + j]!
  const variance =
    (base * base * at(1, 1) + 2 * base * extra * at(1, 2) + extra * extra * at(2, 2)) / startRate ** 2
  const scale = longRunScale({ ...like, residuals: solution.residuals }, data)
  // 0.03: the law need not be quite linear
  const half = t95(scale.degreesOfFreedom) * Math.hypot(Math.sqrt(variance * scale.variance), 0.03)
  return {
    chiSquared: solution.chiSquared,
    startExcessPpm: start,
    startRatePerHour: startRate,
    endRatePerHour: base + extra * left,
    startLowPerHour: startRate * Math.exp(-half),
    startHighPerHour: startRate * Math.exp(half),
    backgroundPpm: prior.ppm + shift,
    rateAfter: (t) => base + (extra * demandExcess(t, start, base, extra)) / start,
  }
}

/** Whether the rate of a run follows CO2, asked of runs that slow down in steps and of runs that bend under a single rate. */
import { type DemandFit, fitDemand } from './demand'
import { longRunScale } from './noise'
import type { Binned, PiecewiseFit, Prior } from './piecewise'
import { hingeScores } from './segments'

/** How much worse than steps demand control may fit and still be taken, in chi squared: the smooth law is the likelier one. */
const DEMAND_MARGIN = 5
/** Gain in chi squared that demand control must bring over one rate. */
const GRADUAL_GAIN = 7

const slowsDown = (fit: PiecewiseFit) =>
  fit.ratesPerHour.length > 1 &&
  fit.ratesPerHour.every((rate, k) => k === 0 || rate < fit.ratesPerHour[k - 1]!)

/** Demand control, when it explains the readings about as well as steps do; a step that is really sharp is a step. */
function demandOf(part: Binned, prior: Prior, steps: PiecewiseFit): DemandFit | null {
  const demand = fitDemand(part, prior, steps)
  if (!demand || demand.startRatePerHour < 1.25 * demand.endRatePerHour) return null
  const spare = 2 * (steps.breaksH.length * 2 - 1)
  const variance = longRunScale(steps, part).variance
  return demand.chiSquared < steps.chiSquared + (spare + DEMAND_MARGIN) * variance ? demand : null
}

/** Demand control in a run, where the readings speak for it; null otherwise. */
export function demandIn(
  part: Binned,
  prior: Prior,
  fit: PiecewiseFit,
  weighed: PiecewiseFit,
): DemandFit | null {
  if (slowsDown(weighed)) return demandOf(part, prior, fit)
  return bendsDown(weighed, part, prior) ? gradualDemand(part, prior, fit) : null
}

/** Until when the rate is still near that of the occupied end: it has fallen to six tenths, at least ten minutes on. */
export function occupiedEnd(demand: DemandFit, fromH: number, toH: number): number {
  for (let t = 0.02; fromH + t < toH; t += 0.02) {
    if (demand.rateAfter(t) < 0.6 * demand.startRatePerHour) return fromH + Math.max(t, 1 / 6)
  }
  return toH
}

/** One rate fits, yet the readings would rather have it fall: worth asking whether it follows CO2. */
function bendsDown(fit: PiecewiseFit, part: Binned, prior: Prior): boolean {
  if (
    fit.ratesPerHour.length > 1 ||
    fit.ratesPerHour[0]! * (part.timeH[part.timeH.length - 1]! - part.timeH[0]!) < 1
  )
    return false
  return hingeScores(part, fit, prior).some((score) => score < -2)
}

/** Demand control that a single rate hides: clearly better, and the rate falls by a third or more. */
function gradualDemand(part: Binned, prior: Prior, one: PiecewiseFit): DemandFit | null {
  const demand = fitDemand(part, prior, one)
  if (!demand || demand.startRatePerHour < 1.5 * demand.endRatePerHour) return null
  return demand.chiSquared < one.chiSquared - GRADUAL_GAIN * Math.max(1, longRunScale(one, part).variance)
    ? demand
    : null
}

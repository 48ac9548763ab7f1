/** From a fit to a rate with a 95 % interval: regression with correlated residuals, background, and choice of model. */
import { biasCorrectedCorrelation, lagOneCorrelation } from '@/lib/math/autocorrelation'
import { t95 } from '@/lib/math/student-t'
import { longRunScale } from './noise'
import {
  type Binned,
  fitPiecewise,
  type PiecewiseFit,
  type Prior,
  piecewiseValue,
  startFrom,
} from './piecewise'

/** Standard uncertainty of ln A from what no single model says: wind, doors, choice of window (chosen; checked by the coverage suites). */
const MODEL_SHARE = 0.025

export type RateEstimate = {
  ratePerHour: number
  lowPerHour: number
  highPerHour: number
  parts: { regression: number; background: number; model: number }
  lagOne: number
  effectivePoints: number
  residualSdPpm: number
  /** long-run variance of the residuals over what noise and mixing explain */
  misfit: number
}

/** The same readings with noise scaled up to what their residuals show. */
export function scaledBins(data: Binned, factor: number): Binned {
  return { ...data, sdPpm: data.sdPpm.map((sd) => sd * factor) }
}

/** Refits with the noise that the residuals show, so that readings and the background's prior are weighed rightly. */
export function reweighed(data: Binned, fit: PiecewiseFit, prior: Prior | null) {
  const scale = longRunScale(fit, data)
  const factor = Math.sqrt(scale.variance)
  const again = fitPiecewise(scaledBins(data, factor), fit.fromH, fit.breaksH, prior, startFrom(fit), 10)
  return { fit: again ?? fit, scale, factor: again ? factor : 1 }
}

/** Standard uncertainty of ln A for rate k: [with the background known, with it as uncertain as it is]. */
export function logRateUncertainty(fit: PiecewiseFit, k: number): { regression: number; background: number } {
  const size = fit.ratesPerHour.length + 3
  const at = (i: number, j: number) => fit.covariance[i * size + j]!
  const a = k + 1
  const b = size - 2
  const d = size - 1
  const rate = Math.abs(fit.ratesPerHour[k]!)
  const determinant = at(b, b) * at(d, d) - at(b, d) ** 2
  const explained =
    (at(a, b) ** 2 * at(d, d) - 2 * at(a, b) * at(a, d) * at(b, d) + at(a, d) ** 2 * at(b, b)) / determinant
  const background = determinant > 0 ? Math.max(0, explained) : 0
  return {
    regression: Math.sqrt(Math.max(0, at(a, a) - background)) / rate,
    background: Math.sqrt(background) / rate,
  }
}

/** Root mean square distance between readings and fit, ppm. */
export function residualSd(data: Binned, fit: PiecewiseFit): number {
  let sum = 0
  for (let i = 0; i < data.timeH.length; i++) sum += (data.ppm[i]! - piecewiseValue(fit, data.timeH[i]!)) ** 2
  return Math.sqrt(sum / Math.max(1, data.timeH.length - 3))
}

/** The estimate of rate k with its interval on the scale of ln A. `stepS` is the time between readings. */
export function rateEstimate(
  weighed: ReturnType<typeof reweighed>,
  k: number,
  residualSdPpm: number,
  stepS: number,
): RateEstimate {
  const { fit } = weighed
  const ratePerHour = fit.ratesPerHour[k]!
  const { regression, background } = logRateUncertainty(fit, k)
  // the rate itself wanders, a little less over a long window; coarse sampling hides where the window really starts
  const model = Math.hypot(MODEL_SHARE, 0.02 * Math.min(2, (stepS / 3600) * Math.abs(ratePerHour)))
  const { degreesOfFreedom } = weighed.scale
  const half = Math.hypot(t95(degreesOfFreedom) * regression, 1.96 * background, 1.96 * model)
  return {
    ratePerHour,
    lowPerHour: ratePerHour * Math.exp(-half),
    highPerHour: ratePerHour * Math.exp(half),
    parts: { regression, background, model },
    lagOne: biasCorrectedCorrelation(lagOneCorrelation(fit.residuals), fit.points),
    effectivePoints: degreesOfFreedom,
    residualSdPpm,
    misfit: weighed.scale.variance,
  }
}

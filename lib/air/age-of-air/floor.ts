import type { Curve } from './curve'
import { fitSteady } from './steady'

/** Smallest floor, as a share of the step, that is called one. */
const LEAST_FLOOR = 0.02

/**
 * Whether a record levels off above its final value: a fitted floor above 2 % of the step, four of its own uncertainties and four of the
 * background's. A record that has not yet bent is not judged.
 */
export function levelsOff(curve: Curve, backgroundDoubt: number): boolean {
  const samples = curve.timeS.map((t, i) => [t, curve.share[i]!] as const)
  const fit = fitSteady([samples])
  const last = curve.share.at(-1)!
  if (!fit || last > 0.4) return false
  // only a record that is nearly at its floor can show it: slow second modes look like one from afar
  const reached = Math.abs(fit.level - last) < 0.25 * Math.abs(fit.level)
  const least = Math.max(LEAST_FLOOR, 4 * fit.standardUncertainty, 4 * backgroundDoubt)
  return reached && fit.level > least
}

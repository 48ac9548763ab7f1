import { NORMAL_975 } from '@/lib/math/normal'
import { flowLitresPerSecond } from '@/lib/units'

/** A quantity with its relative standard uncertainty and 95 % limits (on the ln scale). */
export type Propagated = { value: number; relativeUncertainty: number; low: number; high: number }

function propagated(value: number, relativeUncertainty: number): Propagated {
  const reach = Math.exp(NORMAL_975 * relativeUncertainty)
  return { value, relativeUncertainty, low: value / reach, high: value * reach }
}

/**
 * Outdoor flow per person, L/s, from the rate of an outdoor-air decay: A V / (3.6 n), relative uncertainties in quadrature.
 * @throws RangeError when rate, volume or number of people is not positive
 * @source GUM (JCGM 100:2008), product of independent quantities
 */
export function flowPerPersonLps(
  input: { airChangeRatePerHour: number; volumeM3: number; persons: number },
  relative: { rate: number; volume: number; persons: number },
): Propagated {
  const { airChangeRatePerHour, volumeM3, persons } = input
  if (!(airChangeRatePerHour > 0 && volumeM3 > 0 && persons > 0)) {
    throw new RangeError('rate, volume and number of people must be positive')
  }
  const value = flowLitresPerSecond(airChangeRatePerHour, volumeM3) / persons
  return propagated(value, Math.hypot(relative.rate, relative.volume, relative.persons))
}

/**
 * Outdoor flow per person, L/s, from a steady level: 10^6 g / (C − Cb). Only for levels that were steady for three time constants.
 * @throws RangeError when the level is not above the background
 * @source GUM (JCGM 100:2008); ASTM D6245 warns of using it without checking its assumptions
 */
export function steadyFlowPerPersonLps(
  input: { co2Ppm: number; backgroundPpm: number; generationLpsPerPerson: number },
  uncertainty: { co2Ppm: number; backgroundPpm: number; generation: number },
): Propagated {
  const excess = input.co2Ppm - input.backgroundPpm
  if (!(excess > 0)) throw new RangeError('the steady level must lie above the background')
  const ofExcess = Math.hypot(uncertainty.co2Ppm, uncertainty.backgroundPpm) / excess
  return propagated(
    (1e6 * input.generationLpsPerPerson) / excess,
    Math.hypot(uncertainty.generation, ofExcess),
  )
}

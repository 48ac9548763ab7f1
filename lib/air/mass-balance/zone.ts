/** One well-mixed room over a stretch of constant people, flow and outdoor level. */
export type ZoneStep = {
  co2Ppm: number
  backgroundPpm: number
  persons: number
  generationLpsPerPerson: number
  airChangeRatePerHour: number
  volumeM3: number
  durationS: number
}

/**
 * CO2 (ppm) at the end of the stretch, exact for any length: C = Ceq + (C0 − Ceq) e^(−A t), Ceq = Cb + 10^6 n g / Q. Without any air
 * change it rises in a straight line.
 * @throws RangeError when the volume is not positive or the rate is negative
 * @source single-zone mass balance (Batterman 2017, Int. J. Environ. Res. Public Health 14:145)
 */
export function co2AfterStepPpm(step: ZoneStep): number {
  const {
    co2Ppm,
    backgroundPpm,
    persons,
    generationLpsPerPerson,
    airChangeRatePerHour,
    volumeM3,
    durationS,
  } = step
  if (!(volumeM3 > 0)) throw new RangeError(`volume must be positive, got ${volumeM3} m³`)
  if (!(airChangeRatePerHour >= 0))
    throw new RangeError(`rate must not be negative, got ${airChangeRatePerHour} 1/h`)
  const sourcePpmPerS = (1e6 * persons * generationLpsPerPerson) / (1000 * volumeM3)
  const x = (airChangeRatePerHour * durationS) / 3600
  // (1 − e^(−x))/x instead of an equilibrium level, which runs away as the rate goes to nothing
  const held = x > 1e-12 ? -Math.expm1(-x) / x : 1
  return backgroundPpm + (co2Ppm - backgroundPpm) * Math.exp(-x) + sourcePpmPerS * durationS * held
}

/** The same room through a list of steps; returns the level after each. People, rate and outdoor level may change from step to step. */
export function co2CoursePpm(
  start: { co2Ppm: number; volumeM3: number; generationLpsPerPerson: number },
  steps: readonly Pick<ZoneStep, 'backgroundPpm' | 'persons' | 'airChangeRatePerHour' | 'durationS'>[],
): number[] {
  let co2Ppm = start.co2Ppm
  return steps.map((step) => {
    co2Ppm = co2AfterStepPpm({ ...start, ...step, co2Ppm })
    return co2Ppm
  })
}

/**
 * Outdoor flow (L/s) that holds a level steady: Q = 10^6 n g / (C − Cb). From a peak that is not yet steady it is too high: by 58 % after
 * one time constant, 5 % after three.
 * @throws RangeError when the level is not above the background
 * @source steady-state balance, ASTM D6245
 */
export function steadyFlowLps(input: {
  co2Ppm: number
  backgroundPpm: number
  persons: number
  generationLpsPerPerson: number
}): number {
  const excess = input.co2Ppm - input.backgroundPpm
  if (!(excess > 0)) throw new RangeError('the steady level must lie above the background')
  return (1e6 * input.persons * input.generationLpsPerPerson) / excess
}

/** Share of outdoor air at an air handler, (Cr − Cs)/(Cr − Co), with its standard uncertainty for readings that each have `uPpm`. */
export function outdoorAirFraction(input: {
  returnPpm: number
  supplyPpm: number
  outdoorPpm: number
  uPpm: number
}): { value: number; standardUncertainty: number } | null {
  const span = input.returnPpm - input.outdoorPpm
  // below five uncertainties the quotient says nothing
  if (!(span > 5 * input.uPpm) || !(span > 0)) return null
  const value = (input.returnPpm - input.supplyPpm) / span
  const standardUncertainty = (input.uPpm / span) * Math.sqrt((1 - value) ** 2 + 1 + value ** 2)
  return { value, standardUncertainty }
}

/** CO2 in exhaled air, ppm (38 000; Rudnick & Milton 2003). */
const EXHALED_PPM = 38_000

/** Shown wherever two scenarios are compared. */
export const REBREATHED_CAUTION =
  'For comparing scenarios only, never as safe or unsafe: it counts dilution by outdoor air alone, not filters, masks or distance, and assumes well-mixed air.'

/**
 * Share of inhaled air that someone in the room has breathed before: (C − Co) / 38 000 ppm.
 * @source Rudnick & Milton 2003, Indoor Air 13:237
 */
export function rebreathedFraction(co2Ppm: number, outdoorPpm: number): number {
  return Math.max(0, co2Ppm - outdoorPpm) / EXHALED_PPM
}

/** Mean excess (ppm) while a room builds up from the background: Ess [1 − (1 − e^(−At))/(At)]. */
export function meanBuildUpExcessPpm(
  steadyExcessPpm: number,
  airChangeRatePerHour: number,
  hours: number,
): number {
  const x = airChangeRatePerHour * hours
  return x > 0 ? steadyExcessPpm * (1 + Math.expm1(-x) / x) : 0
}

export type SharedAir = { meanCo2Ppm: number; outdoorPpm: number; persons: number; hours: number }

/** Expected inhaled quanta per infector and quantum an hour: f t / n. Only its ratio between scenarios means anything. */
function sharedDose({ meanCo2Ppm, outdoorPpm, persons, hours }: SharedAir): number {
  if (!(persons > 0 && hours > 0)) throw new RangeError('people and hours must be positive')
  return (rebreathedFraction(meanCo2Ppm, outdoorPpm) * hours) / persons
}

/**
 * How much rebreathed air a person takes in in one scenario against another, per infector present: above 1 is more. No absolute risk is
 * ever given: the source term is uncertain by orders of magnitude.
 * @source Rudnick & Milton 2003; the exponent of their Wells–Riley form without the quanta, which cancel
 */
export function relativeRebreathed(scenario: SharedAir, against: SharedAir): number {
  const base = sharedDose(against)
  if (!(base > 0)) throw new RangeError('the scenario compared against has no rebreathed air')
  return sharedDose(scenario) / base
}

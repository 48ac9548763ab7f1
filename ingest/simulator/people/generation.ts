/**
 * CO2 that one person breathes out. Persily & de Jonge, Carbon dioxide generation rates for building occupants,
 * Indoor Air 27 (2017) 868–879, equation 10; basal metabolic rate by Schofield (1985).
 * Written for the simulator alone, so that the science under test is not checked against itself.
 */

export type Sex = 'male' | 'female'
export type Body = { sex: Sex; ageYears: number; massKg: number }

/** Schofield's lines: [below age, slope MJ/(day·kg), intercept MJ/day]. */
const SCHOFIELD: Record<Sex, readonly (readonly [number, number, number])[]> = {
  male: [
    [3, 0.249, -0.127],
    [10, 0.095, 2.11],
    [18, 0.074, 2.754],
    [30, 0.063, 2.896],
    [60, 0.048, 3.653],
    [Number.POSITIVE_INFINITY, 0.049, 2.459],
  ],
  female: [
    [3, 0.244, -0.13],
    [10, 0.085, 2.033],
    [18, 0.056, 2.898],
    [30, 0.062, 2.036],
    [60, 0.034, 3.538],
    [Number.POSITIVE_INFINITY, 0.038, 2.755],
  ],
}

/** Basal metabolic rate, MJ/day. */
export function basalMetabolicRateMJPerDay(body: Body): number {
  const line = SCHOFIELD[body.sex].find(([below]) => body.ageYears < below)
  if (!line) throw new RangeError(`no metabolic line for age ${body.ageYears}`)
  return line[1] * body.massKg + line[2]
}

/** CO2 generation, L/s at the room's temperature and pressure; `metabolicRate` is a multiple of the basal rate. */
export function co2GenerationLps(
  body: Body,
  metabolicRate: number,
  temperatureK: number,
  pressureKPa: number,
  respiratoryQuotient = 0.85,
): number {
  return (
    respiratoryQuotient *
    basalMetabolicRateMJPerDay(body) *
    metabolicRate *
    (temperatureK / pressureKPa) *
    0.000211
  )
}

/** Air pressure at an altitude, kPa (international standard atmosphere). */
export function pressureAtKPa(altitudeM: number): number {
  return 101.325 * (1 - 2.25577e-5 * altitudeM) ** 5.25588
}

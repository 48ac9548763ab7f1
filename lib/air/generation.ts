/** CO2 that people give off. Rates are L/s of CO2 per person at room temperature and pressure. */

export type Sex = 'male' | 'female'

/** Room state for the generated volume: a litre at 273 K is more litres in a warm room. */
export type AirState = { temperatureK: number; pressureKPa: number }

/** State of the printed table of Persily & de Jonge: 273 K, 101 kPa. */
export const TABLE_STATE: AirState = { temperatureK: 273, pressureKPa: 101 }
/** An ordinary room: 22 °C at sea level. */
export const ROOM_STATE: AirState = { temperatureK: 295.15, pressureKPa: 101.325 }

/** EN 16798-1 default of 20 L/h per person, L/s (quoted in other publications; see sources). */
export const EN_DEFAULT_GENERATION_LPS = 20 / 3600

/** Respiratory quotient of Persily & de Jonge's table. */
const DEFAULT_RESPIRATORY_QUOTIENT = 0.85

/** Upper age bound (years, exclusive), then slope (MJ/day per kg) and constant (MJ/day). Schofield 1985. */
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

/**
 * Basal metabolic rate, MJ/day.
 * @throws RangeError when age is negative or mass is not positive
 * @source Schofield 1985, as used in Persily & de Jonge 2017 Table 1
 */
export function basalMetabolicRateMJPerDay(sex: Sex, ageYears: number, massKg: number): number {
  if (!(ageYears >= 0)) throw new RangeError(`age must not be negative, got ${ageYears}`)
  if (!(massKg > 0)) throw new RangeError(`mass must be positive, got ${massKg} kg`)
  const row = SCHOFIELD[sex].find(([below]) => ageYears < below)!
  return row[1] * massKg + row[2]
}

function checkState({ temperatureK, pressureKPa }: AirState): void {
  if (!(temperatureK > 200 && temperatureK < 350)) {
    throw new RangeError(`temperature must be in kelvin (200 to 350), got ${temperatureK}`)
  }
  if (!(pressureKPa > 40 && pressureKPa < 120)) {
    throw new RangeError(`pressure must be in kPa (40 to 120), got ${pressureKPa}`)
  }
}

type Metabolism = { basalMetabolicRateMJPerDay: number; met: number }

function checkMetabolism({ basalMetabolicRateMJPerDay, met }: Metabolism): void {
  if (!(basalMetabolicRateMJPerDay > 0 && met > 0)) {
    throw new RangeError('basal metabolic rate (MJ/day) and met must be positive')
  }
}

/**
 * CO2 generation of one person, L/s at the given room state: RQ BMR M (T/P) 0.000211. `met` is a multiple of this person's own BMR, not
 * of 58.2 W/m²: the two differ by about 20 to 30 %.
 * @source Persily & de Jonge 2017, equation 10
 */
export function generationLpsPerPerson(
  person: Metabolism & { respiratoryQuotient?: number },
  state: AirState = ROOM_STATE,
): number {
  checkState(state)
  checkMetabolism(person)
  const rq = person.respiratoryQuotient ?? DEFAULT_RESPIRATORY_QUOTIENT
  return (
    rq * person.basalMetabolicRateMJPerDay * person.met * (state.temperatureK / state.pressureKPa) * 0.000211
  )
}

/** The published short form for RQ 0.85: BMR M (T/P) 0.000179. @source Persily & de Jonge 2017, equation 11 */
export function generationLpsEquation11(person: Metabolism, state: AirState = ROOM_STATE): number {
  checkState(state)
  checkMetabolism(person)
  return person.basalMetabolicRateMJPerDay * person.met * (state.temperatureK / state.pressureKPa) * 0.000179
}

/** L/s at 273 K and 101 kPa, the state of the published Table 4: BMR M 0.000484. @source Persily & de Jonge 2017, equation 9 */
export function generationLpsAtTableState(person: Metabolism): number {
  checkMetabolism(person)
  return person.basalMetabolicRateMJPerDay * person.met * 0.000484
}

/** Factor from a volume at the table's state to the same amount of gas at room state (ideal gas). */
export function roomStateFactor(state: AirState = ROOM_STATE): number {
  checkState(state)
  return (state.temperatureK / TABLE_STATE.temperatureK) * (TABLE_STATE.pressureKPa / state.pressureKPa)
}

/** Body surface, m²: 0.203 H^0.725 W^0.425. @source DuBois & DuBois 1916 (from memory) */
export function duBoisSurfaceM2(heightM: number, massKg: number): number {
  if (!(heightM > 0 && massKg > 0)) throw new RangeError('height and mass must be positive')
  return 0.203 * heightM ** 0.725 * massKg ** 0.425
}

/**
 * Older formula for the generation of one person, L/s: 0.00276 A_D M RQ / (0.23 RQ + 0.77), M in met of 58.2 W/m². Kept for comparison
 * with reports that used it.
 * @source ASHRAE Fundamentals, ASTM D6245-12 (from memory)
 */
export function generationLpsDuBois(surfaceM2: number, met: number, respiratoryQuotient = 0.83): number {
  return (0.00276 * surfaceM2 * met * respiratoryQuotient) / (0.23 * respiratoryQuotient + 0.77)
}

/** A group of like people in a room. */
export type PersonGroup = { count: number; sex: Sex; ageYears: number; massKg: number; met: number }

/** Relative standard uncertainties of generation (from memory, methods section 3.3): one person to the next, and the met level itself. */
const PERSON_TO_PERSON = 0.18
const MET_LEVEL = 0.15

/**
 * Generation of a whole room, L/s at room state, with its standard uncertainty: the difference from person to person shrinks with their
 * number, the error of the activity level does not.
 */
export function roomGenerationLps(
  groups: readonly PersonGroup[],
  state: AirState = ROOM_STATE,
): { generationLps: number; standardUncertaintyLps: number; persons: number } {
  let total = 0
  let personVariance = 0
  let persons = 0
  for (const { count, sex, ageYears, massKg, met } of groups) {
    const bmr = basalMetabolicRateMJPerDay(sex, ageYears, massKg)
    const each = generationLpsPerPerson({ basalMetabolicRateMJPerDay: bmr, met }, state)
    total += count * each
    personVariance += count * (PERSON_TO_PERSON * each) ** 2
    persons += count
  }
  const standardUncertaintyLps = Math.hypot(Math.sqrt(personVariance), MET_LEVEL * total)
  return { generationLps: total, standardUncertaintyLps, persons }
}

import { NORMAL_975 } from '@/lib/math/normal'
import { flowLitresPerSecond } from '@/lib/units'

export type HeadcountInput = {
  /** levels at the two ends of the stretch, smoothed over a few minutes */
  fromPpm: number
  toPpm: number
  durationS: number
  volumeM3: number
  airChangeRatePerHour: number
  backgroundPpm: number
  generationLpsPerPerson: number
  /** standard uncertainties: levels and background in ppm, the rest relative */
  uncertainty: { levelPpm: number; backgroundPpm: number; rate: number; volume: number; generation: number }
}

type Values = Omit<HeadcountInput, 'uncertainty'>

/** Level the room was heading for, exact for constant people: (C2 − C1 e^(−AΔt)) / (1 − e^(−AΔt)). */
function headingPpm({ fromPpm, toPpm, durationS, airChangeRatePerHour }: Values): number {
  const kept = Math.exp((-airChangeRatePerHour * durationS) / 3600)
  return (toPpm - fromPpm * kept) / (1 - kept)
}

function personsOf(values: Values): number {
  const flowLps = flowLitresPerSecond(values.airChangeRatePerHour, values.volumeM3)
  return (flowLps * (headingPpm(values) - values.backgroundPpm)) / (1e6 * values.generationLpsPerPerson)
}

/**
 * Number of people from the CO2 balance of a room with a known rate, with a 95 % interval that holds the sensor's noise, the background,
 * rate, volume and generation. Short stretches drown in noise: at one minute and 10 ppm the answer is worth ± 8 people in 180 m³.
 * @returns persons as a real number, never below 0
 * @throws RangeError when duration, volume, rate or generation is not positive
 * @source exact solution of the single-zone balance (methods T43); propagation after GUM (JCGM 100)
 */
export function headcount(input: HeadcountInput): { persons: number; low: number; high: number } {
  const { uncertainty, ...values } = input
  const positive = [
    values.durationS,
    values.volumeM3,
    values.airChangeRatePerHour,
    values.generationLpsPerPerson,
  ]
  if (!positive.every((value) => value > 0)) {
    throw new RangeError('duration, volume, rate and generation must be positive')
  }
  const persons = personsOf(values)
  const partials: [keyof Values, number][] = [
    ['fromPpm', uncertainty.levelPpm],
    ['toPpm', uncertainty.levelPpm],
    ['backgroundPpm', uncertainty.backgroundPpm],
    ['airChangeRatePerHour', uncertainty.rate * values.airChangeRatePerHour],
    ['volumeM3', uncertainty.volume * values.volumeM3],
    ['generationLpsPerPerson', uncertainty.generation * values.generationLpsPerPerson],
  ]
  const variance = partials.reduce((sum, [name, u]) => {
    const up = personsOf({ ...values, [name]: values[name] + u })
    const down = personsOf({ ...values, [name]: values[name] - u })
    return sum + ((up - down) / 2) ** 2
  }, 0)
  const half = NORMAL_975 * Math.sqrt(variance)
  return {
    persons: Math.max(0, persons),
    low: Math.max(0, persons - half),
    high: Math.max(0, persons + half),
  }
}

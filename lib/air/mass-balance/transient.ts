import { profileFit } from '@/lib/math/profile-fit'
import { flowLitresPerSecond } from '@/lib/units'
import type { Series } from '../types'

export type TransientInput = {
  series: Series
  /** people in the room from each reading to the next, as many as readings */
  persons: ArrayLike<number>
  generationLpsPerPerson: number
  backgroundPpm: number
  volumeM3: number
  /** fit how much people really give off beside the rate; needs occupied and empty stretches. Default false */
  fitGeneration?: boolean
}

export type TransientFit = {
  airChangeRatePerHour: number
  lowPerHour: number
  highPerHour: number
  /** fitted over assumed generation, with its standard uncertainty; 1 and 0 when it was not fitted */
  generationScale: number
  generationScaleUncertainty: number
  residualSdPpm: number
}

const RATE_RANGE_PER_HOUR = { low: 0.05, high: 40 }
/** Standard error of ln(rate) beyond which rate and generation cannot be told apart. */
const MOST_LN_ERROR = 0.4

/** Response (ppm) to the people alone from an empty start, exact between readings (zero-order hold). */
function responsePpm(input: TransientInput, ratePerHour: number): number[] {
  const { timeS } = input.series
  const flowLps = flowLitresPerSecond(ratePerHour, input.volumeM3)
  const perPersonPpm = (1e6 * input.generationLpsPerPerson) / flowLps
  const out = [0]
  for (let i = 1; i < timeS.length; i++) {
    const kept = Math.exp((-ratePerHour * (timeS[i]! - timeS[i - 1]!)) / 3600)
    out.push(out[i - 1]! * kept + perPersonPpm * input.persons[i - 1]! * (1 - kept))
  }
  return out
}

/**
 * Air-change rate of a room from a whole day's record with known numbers of people: exact mass balance between readings, rate (and on
 * request the generation's scale) by least squares, interval for correlated residuals. Rate and generation separate only when the number
 * of people changes.
 * @returns null when the record cannot tell: too few readings, or rate and generation not separable
 * @throws RangeError when persons and readings differ in number
 * @source transient mass balance with known occupancy (Batterman 2017)
 */
export function fitTransientBalance(input: TransientInput): TransientFit | null {
  const { timeS, co2Ppm } = input.series
  if (input.persons.length !== timeS.length)
    throw new RangeError('one number of people per reading is needed')
  if (timeS.length < 12) return null
  const hours = Array.from(timeS, (t) => (t - timeS[0]!) / 3600)
  const excess = Array.from(co2Ppm, (ppm) => ppm - input.backgroundPpm)
  const fitted = input.fitGeneration === true
  const fit = profileFit(
    excess,
    (rate) => {
      const start = hours.map((h) => Math.exp(-rate * h))
      const people = responsePpm(input, rate)
      return fitted ? { basis: [start, people] } : { basis: [start], offset: people }
    },
    RATE_RANGE_PER_HOUR,
  )
  if (!fit || fit.lnStandardError > MOST_LN_ERROR) return null
  return {
    airChangeRatePerHour: fit.parameter,
    lowPerHour: fit.low,
    highPerHour: fit.high,
    generationScale: fitted ? fit.coefficients[1]! : 1,
    generationScaleUncertainty: fitted ? fit.coefficientStandardErrors[1]! : 0,
    residualSdPpm: fit.residualSd,
  }
}

import { profileFit } from '@/lib/math/profile-fit'
import type { Series } from '../types'

/**
 * Rate (1/h) and final level (ppm) from three levels equally far apart in time, rising or falling: A = −ln[(C3 − C2)/(C2 − C1)]/Δt. Needs
 * no background and no number of people, but is very sensitive to noise: use long averages about a time constant apart.
 * @returns null when the three do not approach a level
 * @source derived from the exponential course (methods T3 to T5)
 */
export function threePointRate(
  levelsPpm: readonly [number, number, number],
  spacingS: number,
): { airChangeRatePerHour: number; finalPpm: number } | null {
  const [c1, c2, c3] = levelsPpm
  const ratio = (c3 - c2) / (c2 - c1)
  if (!(ratio > 0 && ratio < 1) || !(spacingS > 0)) return null
  return {
    airChangeRatePerHour: (-Math.log(ratio) / spacingS) * 3600,
    finalPpm: (c1 * c3 - c2 * c2) / (c1 + c3 - 2 * c2),
  }
}

export type BuildUp =
  | {
      airChangeRatePerHour: number
      lowPerHour: number
      highPerHour: number
      finalPpm: number
      /** record length in time constants */
      timeConstants: number
      sentence: string
    }
  | {
      airChangeRatePerHour: null
      reason: 'too-few-points' | 'start-too-low' | 'too-short' | 'not-identifiable'
    }

const LEAST_POINTS = 10
const LEAST_RISE_PPM = 100
/** A rise must be followed this far for its bend to be seen (methods section 1.3). */
const LEAST_TIME_CONSTANTS = 1.5
/** Relative 95 % half-width beyond which no figure is given. */
const MOST_HALF_WIDTH = 0.5
const RATE_RANGE_PER_HOUR = { low: 0.05, high: 40 }

/**
 * Air-change rate from the time constant of a rise with constant people: C = C∞ − (C∞ − C0) e^(−A t), both levels and A fitted. The rate
 * does not depend on how much CO2 a person gives off; a number of people that changed during the rise spoils it, and nothing in the
 * record can prove that it did not, so the figure is never better than doubtful.
 * @param rise the record of the rise only, settled mixing left out
 * @source build-up method, e.g. Batterman 2017; fit by variable projection
 */
export function fitBuildUp(rise: Series): BuildUp {
  const n = rise.timeS.length
  if (n < LEAST_POINTS) return { airChangeRatePerHour: null, reason: 'too-few-points' }
  const startS = rise.timeS[0]!
  const hours = Array.from(rise.timeS, (t) => (t - startS) / 3600)
  const values = Array.from(rise.co2Ppm)
  const span = hours[n - 1]!
  const third = Math.max(1, Math.floor(n / 5))
  const mean = (part: readonly number[]) => part.reduce((sum, value) => sum + value, 0) / part.length
  if (mean(values.slice(-third)) - mean(values.slice(0, third)) < LEAST_RISE_PPM) {
    return { airChangeRatePerHour: null, reason: 'start-too-low' }
  }
  const fit = profileFit(
    values,
    (rate) => ({ basis: [hours.map(() => 1), hours.map((h) => Math.exp(-rate * h))] }),
    RATE_RANGE_PER_HOUR,
  )
  if (!fit) return { airChangeRatePerHour: null, reason: 'not-identifiable' }
  const timeConstants = fit.parameter * span
  if (timeConstants < LEAST_TIME_CONSTANTS) return { airChangeRatePerHour: null, reason: 'too-short' }
  if (fit.high / fit.parameter - 1 > MOST_HALF_WIDTH || fit.coefficients[1]! >= 0) {
    return { airChangeRatePerHour: null, reason: 'not-identifiable' }
  }
  return {
    airChangeRatePerHour: fit.parameter,
    lowPerHour: fit.low,
    highPerHour: fit.high,
    finalPpm: fit.coefficients[0]!,
    timeConstants,
    sentence: `From the bend of a rise over ${Math.round(span * 60)} min, if the same people stayed throughout.`,
  }
}

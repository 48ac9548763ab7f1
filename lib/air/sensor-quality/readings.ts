import { median } from '@/lib/math/robust'
import type { Series } from '../types'

/** A stretch of the record in which something was found. */
export type Stretch = { fromS: number; toS: number; readings: number }

export type StuckOptions = {
  /** shortest stretch of one value, seconds; default 3 h */
  leastS?: number
  /** a sensor at its upper end is saturated, not stuck */
  rangeMaxPpm?: number
  /** what one step of the display is worth; above 5 ppm a still room may well show one value for hours. Default 1 */
  resolutionPpm?: number
  /** a sensor that reports on change only says nothing while nothing changes */
  reporting?: 'interval' | 'on-change'
}

const STUCK_LEAST_S = 3 * 3600
const STUCK_LEAST_READINGS = 10
const COARSE_PPM = 5

/**
 * Stretches in which a sensor repeated one value for hours: three hours at a resolution of up to 5 ppm, twelve with a coarser one.
 * @source common practice, no normative source
 */
export function findStuck(series: Series, options: StuckOptions = {}): Stretch[] {
  if (options.reporting === 'on-change') return []
  const coarse = (options.resolutionPpm ?? 1) > COARSE_PPM
  const leastS = (options.leastS ?? STUCK_LEAST_S) * (coarse ? 4 : 1)
  const { timeS, co2Ppm } = series
  const found: Stretch[] = []
  let start = 0
  for (let i = 1; i <= timeS.length; i++) {
    if (i < timeS.length && co2Ppm[i] === co2Ppm[start]) continue
    const stretch = { fromS: timeS[start]!, toS: timeS[i - 1]!, readings: i - start }
    const saturated = options.rangeMaxPpm !== undefined && co2Ppm[start]! >= options.rangeMaxPpm
    if (!saturated && stretch.toS - stretch.fromS >= leastS && stretch.readings >= STUCK_LEAST_READINGS) {
      found.push(stretch)
    }
    start = i
  }
  return found
}

/** Half-width of the spike window, readings, and the smallest jump that is called one, ppm. */
const HALF_WINDOW = 3
const LEAST_SPIKE_PPM = 40

/**
 * Indices of single readings that stand out of their seven neighbours: |x − median| > 3 × 1.4826 MAD, and by 40 ppm at least so that a
 * quiet record does not accuse its own noise.
 * @source Hampel identifier (from memory)
 */
export function findSpikes(series: Series): number[] {
  const { co2Ppm } = series
  const found: number[] = []
  for (let i = HALF_WINDOW; i < co2Ppm.length - HALF_WINDOW; i++) {
    const window = co2Ppm.slice(i - HALF_WINDOW, i + HALF_WINDOW + 1)
    const centre = median(window)
    const spread = 1.4826 * median(Float64Array.from(window, (value) => Math.abs(value - centre)))
    if (Math.abs(co2Ppm[i]! - centre) > Math.max(3 * spread, LEAST_SPIKE_PPM)) found.push(i)
  }
  return found
}

/** Limits outside which a pressure-corrected reading of room air is doubted (ppm; common practice). */
export const PLAUSIBLE_ROOM_PPM = { low: 350, high: 5000 } as const

/** Shares of readings below and above the plausible range, after the pressure factor (1 where the sensor compensates). */
export function outOfRangeShares(series: Series, pressureFactor = 1): { below: number; above: number } {
  const n = series.co2Ppm.length
  let below = 0
  let above = 0
  for (const raw of series.co2Ppm) {
    const ppm = raw * pressureFactor
    if (ppm < PLAUSIBLE_ROOM_PPM.low) below++
    else if (ppm > PLAUSIBLE_ROOM_PPM.high) above++
  }
  return n === 0 ? { below: 0, above: 0 } : { below: below / n, above: above / n }
}

/**
 * Fastest rise (ppm/min) that so many people can cause in a room: 60 n g 10^6 / (V 1000). A steeper one over several minutes means breath
 * on the sensor or a wrong volume.
 * @throws RangeError when the volume is not positive
 */
export function fastestRisePpmPerMin(
  persons: number,
  generationLpsPerPerson: number,
  volumeM3: number,
): number {
  if (!(volumeM3 > 0)) throw new RangeError(`volume must be positive, got ${volumeM3} m³`)
  return (60 * persons * generationLpsPerPerson * 1e6) / (volumeM3 * 1000)
}

import { hodgesLehmann } from '@/lib/math/hodges-lehmann'
import { median } from '@/lib/math/robust'
import { mannKendall, theilSen } from '@/lib/math/theil-sen'
import { segment } from '../change/segment'
import { nightsBetween } from '../nights'

/** Level a sensor settles at in an empty room, one per local night (nights that never settled are left out). */
export type NightLow = { night: string; lowPpm: number }

export type SensorDrift = {
  ppmPerMonth: number
  lowPpmPerMonth: number
  highPpmPerMonth: number
  p: number
  nights: number
}

/** Least nights, and the drift from which a sensor is suspected (ppm a month; common practice). */
const DRIFT_LEAST_NIGHTS = 21
const DRIFT_PPM_PER_MONTH = 5
const DRIFT_P = 0.01
const MONTH_NIGHTS = 30
/** Weather moves the outdoor level over several nights: the trend test counts neighbouring nights as half known. */
const NIGHT_CORRELATION_INFLATION = 3

function trendOf(points: readonly { night: string; ppm: number }[]): SensorDrift | null {
  const first = points[0]
  if (!first || points.length < DRIFT_LEAST_NIGHTS) return null
  const x = points.map((point) => nightsBetween(first.night, point.night))
  const y = points.map((point) => point.ppm)
  const line = theilSen(x, y, NIGHT_CORRELATION_INFLATION)
  const { p } = mannKendall(y, NIGHT_CORRELATION_INFLATION)
  const ppmPerMonth = line.slope * MONTH_NIGHTS
  if (p > DRIFT_P || Math.abs(ppmPerMonth) < DRIFT_PPM_PER_MONTH) return null
  return {
    ppmPerMonth,
    lowPpmPerMonth: line.low * MONTH_NIGHTS,
    highPpmPerMonth: line.high * MONTH_NIGHTS,
    p,
    nights: points.length,
  }
}

/** Differences of one sensor's lows from the median of its fellows on the same nights (at least two fellows each night). */
function differences(own: readonly NightLow[], fellows: readonly (readonly NightLow[])[]) {
  const byNight = fellows.map((lows) => new Map(lows.map((low) => [low.night, low.lowPpm])))
  return own.flatMap(({ night, lowPpm }) => {
    const others = byNight.flatMap((lows) => lows.get(night) ?? [])
    return others.length >= 2 ? [{ night, ppm: lowPpm - median(others) }] : []
  })
}

/**
 * Drift of one sensor against its fellows in the building: Theil–Sen on the nightly difference from their median, which the weather and
 * the season leave alone, tested by Mann–Kendall.
 * @param fellows nightly lows of the other sensors, each in order of date
 * @returns null when there is none worth saying (5 ppm a month, p 0.01) or fewer than 21 common nights
 */
export function findDrift(
  own: readonly NightLow[],
  fellows: readonly (readonly NightLow[])[],
): SensorDrift | null {
  return trendOf(differences(own, fellows))
}

/** Drift of a sensor's own nightly lows where it has no fellows; a season may look like one. */
export function findOwnDrift(own: readonly NightLow[]): SensorDrift | null {
  return trendOf(own.map(({ night, lowPpm }) => ({ night, ppm: lowPpm })))
}

export type SensorOffset = {
  offsetPpm: number
  lowPpm: number
  highPpm: number
  nights: number
  suspect: boolean
}

/** Offset accepted between sensors of one building (ppm; common practice for co-location). */
const OFFSET_PPM = 30

/**
 * Offset of one sensor against the median of its fellows, with its 95 % interval over nights; suspect when the whole interval lies more
 * than 30 ppm away.
 * @returns null with fewer than six common nights
 */
export function offsetAgainstFellows(
  own: readonly NightLow[],
  fellows: readonly (readonly NightLow[])[],
): SensorOffset | null {
  const common = differences(own, fellows)
  const location = common.length > 0 ? hodgesLehmann(common.map((point) => point.ppm)) : null
  if (!location || location.low === null || location.high === null) return null
  return {
    offsetPpm: location.location,
    lowPpm: location.low,
    highPpm: location.high,
    nights: common.length,
    suspect: location.low > OFFSET_PPM || location.high < -OFFSET_PPM,
  }
}

export type BaselineStep = { onNight: string; stepPpm: number }

const STEP_LEAST_NIGHTS = 3
const LEAST_NIGHT_NOISE_PPM = 4
/** Smallest step reported against fellows, and alone, where a week of other weather looks like one. */
const STEP_LEAST_PPM = { againstFellows: 15, alone: 40 }

/**
 * Steps in a sensor's nightly lows, as automatic baseline correction makes them when the room never sees outdoor air, or a swap of
 * sensors. Against the median of its fellows where there are at least two, else in its own lows.
 * @returns steps of 15 ppm and more (40 without fellows), at least three nights apart
 */
export function findBaselineSteps(
  own: readonly NightLow[],
  fellows: readonly (readonly NightLow[])[] = [],
): BaselineStep[] {
  const alone = fellows.length < 2
  const points = alone ? own.map(({ night, lowPpm }) => ({ night, ppm: lowPpm })) : differences(own, fellows)
  if (points.length < 2 * STEP_LEAST_NIGHTS) return []
  const values = points.map((point) => point.ppm)
  const jumps = values.slice(1).map((value, i) => Math.abs(value - values[i]!))
  const noise = Math.max(LEAST_NIGHT_NOISE_PPM, (1.4826 * median(jumps)) / Math.SQRT2)
  const least = Math.max(alone ? STEP_LEAST_PPM.alone : STEP_LEAST_PPM.againstFellows, 3 * noise)
  const changes = segment(values, noise ** 2, 4 * Math.log(values.length), STEP_LEAST_NIGHTS)
  return changes.flatMap((at, i) => {
    const before = median(values.slice(changes[i - 1] ?? 0, at))
    const after = median(values.slice(at, changes[i + 1] ?? values.length))
    const stepPpm = after - before
    return Math.abs(stepPpm) >= least ? [{ onNight: points[at]!.night, stepPpm }] : []
  })
}

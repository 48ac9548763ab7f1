import type { DayFacts } from '@/db/queries/nights'
import { limitLevelPpm } from '@/lib/air/room-state'
import { LIMIT_AVERAGING_S } from '@/lib/air/running-mean'
import type { Series } from '@/lib/air/types'
import type { Period } from './occupied'

const STEP_S = 60
/** A mean counts only where readings cover at least half of its quarter of an hour. */
const LEAST_COVERAGE = 0.5

/** Integral of a record that holds each reading until the next, at most `holdS`: values and covered seconds up to each reading. */
function integrate({ timeS, co2Ppm }: Series, holdS: number) {
  const sums = new Float64Array(timeS.length + 1)
  const covered = new Float64Array(timeS.length + 1)
  for (let i = 0; i < timeS.length; i++) {
    const heldS = i + 1 < timeS.length ? Math.min(holdS, timeS[i + 1]! - timeS[i]!) : holdS
    sums[i + 1] = sums[i]! + heldS * co2Ppm[i]!
    covered[i + 1] = covered[i]! + heldS
  }
  /** reads at instants that rise from call to call */
  return () => {
    let at = 0
    return (t: number) => {
      while (at < timeS.length && timeS[at]! <= t) at++
      if (at === 0) return { sum: 0, covered: 0 }
      const heldS = Math.min(t - timeS[at - 1]!, covered[at]! - covered[at - 1]!)
      return { sum: sums[at - 1]! + heldS * co2Ppm[at - 1]!, covered: covered[at - 1]! + heldS }
    }
  }
}

const inside = (periods: readonly Period[], t: number) =>
  periods.some((period) => t >= period.fromS && t < period.toS)

const overlapMin = (periods: readonly Period[]) =>
  periods.reduce((sum, period) => sum + (period.toS - period.fromS) / 60, 0)

/** Median of the outdoor record between two instants, ppm; `fallbackPpm` where there is none. */
export function outdoorLevelOf(outdoor: Series | undefined, fallbackPpm: number): number {
  if (!outdoor || outdoor.co2Ppm.length === 0) return fallbackPpm
  const sorted = outdoor.co2Ppm.slice().sort()
  return Math.round(sorted[Math.floor(sorted.length / 2)]!)
}

/**
 * The day of one room: its fullest quarter of an hour, and how long in occupied hours the 15 min mean stood over the limit. A reading holds
 * until the next but no longer than three of its sensor's intervals, so that a gap is neither over nor under.
 * @source 15 min mean as the limits that are offered ask for (lib/air/targets)
 */
export function dayFacts(input: {
  series: Series
  intervalS: number
  dayStartS: number
  dayEndS: number
  outdoorPpm: number
  limit: { kind: 'above outdoor' | 'absolute'; ppm: number }
  occupied: readonly Period[]
}): DayFacts {
  const { series, dayStartS, dayEndS, outdoorPpm, occupied } = input
  const limitPpm = limitLevelPpm(input.limit, outdoorPpm)
  const makeReader = integrate(series, Math.max(300, 3 * input.intervalS))
  const ahead = makeReader()
  const behind = makeReader()
  const facts: DayFacts = {
    ...{ outdoorPpm, limitPpm, peakPpm: null, peakAtS: null, overMin: 0, coveredMin: 0 },
    occupiedMin: Math.round(overlapMin(occupied)),
  }
  for (let t = dayStartS + STEP_S; t <= dayEndS; t += STEP_S) {
    const now = ahead(t)
    const before = behind(t - LIMIT_AVERAGING_S)
    const covered = now.covered - before.covered
    if (covered < LEAST_COVERAGE * LIMIT_AVERAGING_S) continue
    const mean = (now.sum - before.sum) / covered
    if (facts.peakPpm === null || mean > facts.peakPpm) {
      facts.peakPpm = mean
      facts.peakAtS = t - LIMIT_AVERAGING_S / 2
    }
    if (!inside(occupied, t - STEP_S)) continue
    facts.coveredMin++
    if (mean > limitPpm) facts.overMin++
  }
  if (facts.peakPpm !== null) facts.peakPpm = Math.round(facts.peakPpm)
  return facts
}

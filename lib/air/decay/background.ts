/**
 * The CO2 of the air that replaces room air, as the room's own sensor would read it, with its standard uncertainty. Best first: the level the
 * empty room itself comes to rest at, other nights' resting levels, an outdoor sensor, a dated default last. None lies above the lowest level seen.
 */
import { BACKGROUND, DEFAULT_OUTDOOR } from '@/lib/air/constants'
import type { Background } from '@/lib/air/types'
import { mean, median } from '@/lib/math/robust'
import type { Track } from './falls'
import type { QuietFloor } from './floor'

export type { QuietFloor } from './floor'

export type OutdoorLevel = { ppmAt: (timeS: number) => number | null }

/** Looks up an outdoor record as its mean over two hours around the instant. */
export function outdoorLevel(track: Track): OutdoorLevel {
  return {
    ppmAt(timeS) {
      let sum = 0
      let count = 0
      for (let i = 0; i < track.timeS.length; i++) {
        if (Math.abs(track.timeS[i]! - timeS) > 3600) continue
        sum += track.ppm[i]!
        count++
      }
      return count > 0 ? sum / count : null
    },
  }
}

export type BackgroundInputs = {
  /** resting levels of this day's own record, and its lowest level */
  own: readonly QuietFloor[]
  lowest: QuietFloor | null
  /** other nights */
  history: readonly QuietFloor[]
  outdoor?: OutdoorLevel
  /** the instant that the background is wanted for */
  atS: number
  defaultOutdoor?: { ppm: number; standardUncertaintyPpm: number }
  /** standard uncertainty of the room's sensor level, ppm */
  sensorOffsetPpm?: number
}

type Estimate = { ppm: number; sd: number; origin: Background['origin'] }

function combine(estimates: readonly Estimate[]): Background {
  let weight = 0
  let sum = 0
  let best = estimates[0]!
  for (const estimate of estimates) {
    const w = 1 / estimate.sd ** 2
    weight += w
    sum += w * estimate.ppm
    if (estimate.sd < best.sd) best = estimate
  }
  const spread = Math.sqrt(mean(estimates.map((estimate) => (estimate.ppm - sum / weight) ** 2)))
  const sd = Math.max(1 / Math.sqrt(weight), BACKGROUND.leastPpm)
  return { ppm: sum / weight, standardUncertaintyPpm: Math.hypot(sd, spread / 2), origin: best.origin }
}

/** How far a level `apartS` seconds away may have wandered, ppm. */
function wander(apartS: number, followed: boolean): number {
  const share = Math.min(1, Math.abs(apartS) / BACKGROUND.wanderS)
  const full = followed ? BACKGROUND.wanderFollowedPpm : BACKGROUND.wanderPpm
  return full * Math.sqrt(0.35 + 0.65 * share)
}

function ownEstimates(
  inputs: BackgroundInputs,
  moved: (floor: QuietFloor) => number,
  followed: boolean,
): Estimate[] {
  return inputs.own.map((floor) => ({
    ppm: moved(floor),
    sd: Math.hypot(wander(floor.atS - inputs.atS, followed), floor.sdPpm, Math.abs(floor.slopePpmPerHour)),
    origin: 'own record' as const,
  }))
}

/** Resting levels of other nights that agree with their median; their spread counts in full, for the sensor may drift. */
function nightsEstimate(inputs: BackgroundInputs, moved: (floor: QuietFloor) => number): Estimate | null {
  const reached = inputs.history.filter((floor) => floor.reached).map(moved)
  if (reached.length === 0) return null
  const centre = median(reached)
  const spread = reached.length > 1 ? Math.sqrt(mean(reached.map((level) => (level - centre) ** 2))) : 0
  return { ppm: centre, sd: Math.hypot(BACKGROUND.otherNightPpm, spread), origin: 'quiet nights' }
}

/** The background at an instant; floors are moved along with the outdoor record where there is one. */
export function estimateBackground(inputs: BackgroundInputs): Background {
  const prior = inputs.defaultOutdoor ?? DEFAULT_OUTDOOR
  const outdoorNow = inputs.outdoor?.ppmAt(inputs.atS) ?? null
  const moved = (floor: QuietFloor): number => {
    const then = outdoorNow === null ? null : inputs.outdoor!.ppmAt(floor.atS)
    return then === null ? floor.ppm : floor.ppm + outdoorNow! - then
  }
  const estimates = ownEstimates(inputs, moved, outdoorNow !== null)
  const nights = nightsEstimate(inputs, moved)
  if (nights) estimates.push(nights)
  const sensors = Math.hypot(
    inputs.sensorOffsetPpm ?? BACKGROUND.sensorOffsetPpm,
    outdoorNow === null ? prior.standardUncertaintyPpm : 8,
  )
  const elsewhere: Estimate = {
    ppm: outdoorNow ?? prior.ppm,
    sd: sensors,
    origin: outdoorNow === null ? 'default' : 'outdoor sensor',
  }
  // the room's own sensor is right about its own zero: others count only where it has not spoken
  if (estimates.length === 0) estimates.push(elsewhere)
  const best = combine(estimates)
  // a level at rest near the hour wanted says more than a lower one many hours away
  if (best.origin === 'own record' || !inputs.lowest) return best
  return notAbove(best, moved(inputs.lowest) + BACKGROUND.wanderPpm)
}

/** Mean and spread of a normal variable that is kept below a limit (truncated normal, by its first two moments). */
function notAbove(background: Background, limit: number): Background {
  const sd = background.standardUncertaintyPpm
  const z = (limit - background.ppm) / sd
  if (z > 2) return background
  if (z < -2.5) return { ...background, ppm: limit - 8, standardUncertaintyPpm: Math.max(10, sd / 2) }
  const density = Math.exp(-0.5 * z * z) / Math.sqrt(2 * Math.PI)
  const below = 0.5 * (1 + Math.tanh(0.7978845608 * (z + 0.044715 * z ** 3)))
  const ratio = density / Math.max(below, 1e-6)
  const variance = sd * sd * Math.max(0.1, 1 - z * ratio - ratio * ratio)
  return {
    ...background,
    ppm: background.ppm - sd * ratio,
    standardUncertaintyPpm: Math.max(BACKGROUND.leastPpm, Math.sqrt(variance)),
  }
}

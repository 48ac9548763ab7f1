/** Levels at which a room came to rest: what its own sensor reads in the air that replaces room air. */
import { median } from '@/lib/math/robust'
import type { Fall, Track } from './falls'

/**
 * The level a room rested at in one night: what later nights lean on. `reached` says that a decay was seen to end there, or that the night's
 * lowest level lay still for hours; else it is only the lowest level seen, and the background lies at or below it.
 */
export type QuietFloor = {
  date: string
  atS: number
  ppm: number
  sdPpm: number
  slopePpmPerHour: number
  reached: boolean
}

/** How long a level must be kept to count, seconds. */
const KEPT_S = 2400
/** A floor may not move faster than this, ppm per hour. */
const STILL_PPM_PER_HOUR = 4

type Stretch = { from: number; to: number }

function stretchBetween(track: Track, fromS: number, toS: number): Stretch | null {
  let from = 0
  while (from < track.timeS.length && track.timeS[from]! < fromS) from++
  let to = from
  while (to < track.timeS.length && track.timeS[to]! <= toS) to++
  return to - from >= 3 ? { from, to: to - 1 } : null
}

/** Slope in ppm per hour of a stretch of the track with its standard deviation, by least squares. */
function slopeOf(track: Track, { from, to }: Stretch): { slope: number; sd: number } {
  const n = to - from + 1
  let tm = 0
  let ym = 0
  for (let i = from; i <= to; i++) {
    tm += track.timeS[i]! / n
    ym += track.ppm[i]! / n
  }
  let sxy = 0
  let sxx = 0
  for (let i = from; i <= to; i++) {
    const t = (track.timeS[i]! - tm) / 3600
    sxy += t * (track.ppm[i]! - ym)
    sxx += t * t
  }
  return sxx > 0 ? { slope: sxy / sxx, sd: track.sigmaPpm / Math.sqrt(sxx) } : { slope: 0, sd: 1e3 }
}

/** The lowest mean over forty minutes between two instants; null when the record is too thin. */
export function lowestLevel(track: Track, fromS: number, toS: number, date: string): QuietFloor | null {
  const whole = stretchBetween(track, fromS, toS)
  if (!whole) return null
  const { timeS, ppm } = track
  let best: { from: number; to: number; level: number } | null = null
  let sum = 0
  let start = whole.from
  for (let i = whole.from; i <= whole.to; i++) {
    sum += ppm[i]!
    while (timeS[i]! - timeS[start]! > KEPT_S) sum -= ppm[start++]!
    const count = i - start + 1
    if (count < 3 || timeS[i]! - timeS[start]! < 0.7 * KEPT_S) continue
    if (!best || sum / count < best.level) best = { from: start, to: i, level: sum / count }
  }
  if (!best) return null
  const sdPpm = track.sigmaPpm / Math.sqrt(best.to - best.from + 1)
  const atS = (timeS[best.from]! + timeS[best.to]!) / 2
  const around = stretchBetween(track, Math.max(fromS, atS - 5400), Math.min(toS, atS + 5400))
  const { slope } = around ? slopeOf(track, around) : { slope: 0 }
  const long = longStill(track, best.level, atS)
  // the lowest of many means is low by about two of its deviations
  return { date, atS, ppm: best.level + 1.5 * sdPpm, sdPpm, slopePpmPerHour: slope, reached: long }
}

/** True when the level stayed within a few ppm of `level` for three hours around an instant. */
function longStill(track: Track, level: number, atS: number): boolean {
  const around = stretchBetween(track, atS - 4 * 3600, atS + 4 * 3600)
  if (!around) return false
  const margin = 8 + 2.5 * track.sigmaPpm
  let still = 0
  for (let i = around.from + 1; i <= around.to; i++) {
    const near = Math.abs(track.ppm[i]! - level) < margin
    const step = track.timeS[i]! - track.timeS[i - 1]!
    if (near && step < 1800) still += step
  }
  return still >= 3 * 3600
}

/** Where a fall came to rest: the level from five time constants after its start on, while nothing rises; null when it never did. */
export function floorAfter(track: Track, fall: Fall, date: string): QuietFloor | null {
  const drop = fall.peakPpm - fall.troughPpm
  if (drop < 100) return null
  const half = fall.troughPpm + drop / 2
  let halfS: number | null = null
  for (let i = 0; i < track.timeS.length; i++) {
    if (track.timeS[i]! < fall.fromS || track.ppm[i]! > half) continue
    halfS = track.timeS[i]! - fall.fromS
    break
  }
  if (halfS === null) return null
  // ln 2 of a time constant to the half, so five time constants are 7.2 times as far
  const restS = fall.fromS + 7.2 * Math.max(halfS, 300)
  const rest = stretchBetween(track, restS, Math.min(fall.restS, restS + 3 * 3600))
  if (!rest || track.timeS[rest.to]! - track.timeS[rest.from]! < KEPT_S / 2) return null
  const { slope, sd } = slopeOf(track, rest)
  if (Math.abs(slope) > STILL_PPM_PER_HOUR + 2 * sd) return null
  const level = median(track.ppm.subarray(rest.from, rest.to + 1))
  const atS = (track.timeS[rest.from]! + track.timeS[rest.to]!) / 2
  const sdPpm = (1.25 * track.sigmaPpm) / Math.sqrt(rest.to - rest.from + 1)
  return { date, atS, ppm: level, sdPpm, slopePpmPerHour: slope, reached: true }
}

/** Every level at which the room came to rest, none of them well above the lowest level of the record or of other nights. */
export function restingLevels(
  track: Track,
  falls: readonly Fall[],
  lowest: QuietFloor | null,
  date: string,
  history: readonly QuietFloor[] = [],
): QuietFloor[] {
  const today = (lowest?.ppm ?? Number.POSITIVE_INFINITY) + 28 + 2 * track.sigmaPpm
  const otherwise = Math.min(...history.map((floor) => floor.ppm)) + 60
  const found = falls.map((fall) => floorAfter(track, fall, date)).filter((floor) => floor !== null)
  return found.filter((floor) => floor.ppm <= Math.min(today, otherwise))
}

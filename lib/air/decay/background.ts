/**
 * The CO2 of the air that replaces room air, as the room's own sensor would read it, with its standard uncertainty. Best first: the level the
 * empty room itself settles at, an outdoor sensor corrected for the offset between sensors, other quiet nights, a dated default last.
 */
import { BACKGROUND_WANDER_PPM, DEFAULT_OUTDOOR } from '@/lib/air/constants'
import type { Background } from '@/lib/air/types'
import { mean, median } from '@/lib/math/robust'
import type { Track } from './falls'

/** The lowest level a room kept for a while in one night: what later nights lean on. */
export type QuietFloor = { date: string; atS: number; ppm: number; sdPpm: number; slopePpmPerHour: number }

/** How long a level must be kept to count as a floor, seconds. */
const FLOOR_S = 2400

/** The lowest mean over forty minutes between two instants, with its trend over the two hours around; null when the record is too thin. */
export function quietFloor(track: Track, fromS: number, toS: number, date: string): QuietFloor | null {
  const { timeS, ppm } = track
  let best: { from: number; to: number; level: number } | null = null
  let from = 0
  while (from < timeS.length && timeS[from]! < fromS) from++
  let sum = 0
  let start = from
  for (let i = from; i < timeS.length && timeS[i]! <= toS; i++) {
    sum += ppm[i]!
    while (timeS[i]! - timeS[start]! > FLOOR_S) sum -= ppm[start++]!
    const count = i - start + 1
    if (count < 3 || timeS[i]! - timeS[start]! < 0.7 * FLOOR_S) continue
    if (!best || sum / count < best.level) best = { from: start, to: i, level: sum / count }
  }
  if (!best) return null
  const count = best.to - best.from + 1
  const sdPpm = track.sigmaPpm / Math.sqrt(count)
  const atS = (timeS[best.from]! + timeS[best.to]!) / 2
  // the lowest of many means is low by about two of its deviations
  return { date, atS, ppm: best.level + 1.5 * sdPpm, sdPpm, slopePpmPerHour: slopeAround(track, atS, 3600) }
}

function slopeAround(track: Track, atS: number, halfS: number): number {
  const t: number[] = []
  const y: number[] = []
  for (let i = 0; i < track.timeS.length; i++) {
    if (Math.abs(track.timeS[i]! - atS) > halfS) continue
    t.push((track.timeS[i]! - atS) / 3600)
    y.push(track.ppm[i]!)
  }
  const tm = mean(t)
  const ym = mean(y)
  let sxy = 0
  let sxx = 0
  for (let i = 0; i < t.length; i++) {
    sxy += (t[i]! - tm) * (y[i]! - ym)
    sxx += (t[i]! - tm) ** 2
  }
  return sxx > 0 ? sxy / sxx : 0
}

export type OutdoorLevel = { ppmAt: (timeS: number) => number | null }

/** Looks up an outdoor record as its mean over an hour around the instant. */
export function outdoorLevel(track: Track): OutdoorLevel {
  return {
    ppmAt(timeS) {
      let sum = 0
      let count = 0
      for (let i = 0; i < track.timeS.length; i++) {
        if (Math.abs(track.timeS[i]! - timeS) > 1800) continue
        sum += track.ppm[i]!
        count++
      }
      return count > 0 ? sum / count : null
    },
  }
}

export type BackgroundInputs = {
  own: QuietFloor | null
  history: readonly QuietFloor[]
  outdoor?: OutdoorLevel
  /** the instant that the background is wanted for */
  atS: number
  defaultOutdoor?: { ppm: number; standardUncertaintyPpm: number }
}

type Estimate = { ppm: number; sd: number; origin: Background['origin'] }

/** Floors that agree with the lowest ones: nights on which the room reached outdoor air. */
function lowCluster(levels: readonly number[]): number[] {
  const sorted = [...levels].sort((a, b) => a - b)
  const anchor = sorted[Math.floor((sorted.length - 1) * 0.15)]!
  return sorted.filter((level) => Math.abs(level - anchor) <= 25)
}

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
  return { ppm: sum / weight, standardUncertaintyPpm: 1 / Math.sqrt(weight), origin: best.origin }
}

/** The background at an instant. Floors are compared after taking the outdoor record's own course out of them, where there is one. */
export function estimateBackground(inputs: BackgroundInputs): Background {
  const prior = inputs.defaultOutdoor ?? DEFAULT_OUTDOOR
  const outdoorNow = inputs.outdoor?.ppmAt(inputs.atS) ?? null
  const shift = (floor: QuietFloor): number | null => {
    if (outdoorNow === null) return 0
    const then = inputs.outdoor!.ppmAt(floor.atS)
    return then === null ? null : outdoorNow - then
  }
  const wander = outdoorNow === null ? BACKGROUND_WANDER_PPM : 3
  const others = inputs.history
    .map((floor) => ({ floor, moved: shift(floor) }))
    .filter((entry) => entry.moved !== null)
    .map(({ floor, moved }) => floor.ppm + moved!)
  const estimates: Estimate[] = []
  const own = inputs.own
  const ownMoved = own ? own.ppm + (shift(own) ?? 0) : null
  const levels = ownMoved === null ? others : [...others, ownMoved]
  const cluster = levels.length > 0 ? lowCluster(levels) : []
  const centre = cluster.length > 0 ? median(cluster) : null
  const attained =
    ownMoved !== null && (cluster.length >= 2 ? ownMoved <= centre! + 25 : settled(own!, ownMoved, prior))
  if (attained) {
    const trend = Math.max(0, -own!.slopePpmPerHour - 1.5) * (cluster.length >= 2 ? 1 : 4)
    estimates.push({ ppm: ownMoved!, sd: Math.hypot(wander, own!.sdPpm, trend), origin: 'own record' })
  }
  const elsewhere = attained ? cluster.filter((level) => level !== ownMoved) : cluster
  if (elsewhere.length >= 2 || (elsewhere.length === 1 && !attained && cluster.length >= 2)) {
    const spread = Math.sqrt(mean(elsewhere.map((level) => (level - centre!) ** 2)))
    estimates.push({
      ppm: median(elsewhere),
      sd: Math.hypot(wander, Math.max(8, spread)),
      origin: 'quiet nights',
    })
  }
  if (estimates.length > 0) return combine(estimates)
  return withoutFloor(levels, outdoorNow, prior)
}

/** One night alone counts as settled when the level hardly falls and is no higher than air outdoors plus a sensor's offset can be. */
function settled(
  floor: QuietFloor,
  level: number,
  prior: { ppm: number; standardUncertaintyPpm: number },
): boolean {
  const flat = Math.abs(floor.slopePpmPerHour) < 3
  return flat ? true : level < prior.ppm + 1.5 * prior.standardUncertaintyPpm && floor.slopePpmPerHour > -12
}

/** No floor was reached: outdoor sensor or default, and never above the lowest level seen. */
function withoutFloor(
  levels: readonly number[],
  outdoorNow: number | null,
  prior: { ppm: number; standardUncertaintyPpm: number },
): Background {
  // 20 ppm: the offset between two sensors of ordinary make
  const ppm = outdoorNow ?? prior.ppm
  const sd = outdoorNow === null ? Math.hypot(prior.standardUncertaintyPpm, 20) : 20
  const origin = outdoorNow === null ? 'default' : 'outdoor sensor'
  const lowest = levels.length > 0 ? Math.min(...levels) : Number.POSITIVE_INFINITY
  if (lowest > ppm + 2 * sd) return { ppm, standardUncertaintyPpm: sd, origin }
  // mean of a normal variable kept below the lowest level seen (truncated normal, by its first two moments)
  const z = (lowest - ppm) / sd
  const density = Math.exp(-0.5 * z * z) / Math.sqrt(2 * Math.PI)
  const below = 0.5 * (1 + Math.tanh(0.7978845608 * (z + 0.044715 * z ** 3)))
  const ratio = density / Math.max(below, 1e-6)
  const variance = sd * sd * Math.max(0.05, 1 - z * ratio - ratio * ratio)
  return { ppm: ppm - sd * ratio, standardUncertaintyPpm: Math.max(8, Math.sqrt(variance)), origin }
}

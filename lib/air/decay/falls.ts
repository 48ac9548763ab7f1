/** Where CO2 falls: from a peak to the trough before it rises again, by turning points that stand out from the noise. */
import { DETECTION } from '@/lib/air/constants'
import { quantile } from '@/lib/math/robust'
import { binRecord } from './bins'
import type { CleanRecord } from './clean'

/** A coarse track of the level, for looking only: an on-change sensor's silence is shown as a held value here, and is never fitted. */
export type Track = { timeS: Float64Array; ppm: Float64Array; sigmaPpm: number }
/** `toS` is where it stops falling; `restS` how long the level then stays low. */
export type Fall = { fromS: number; toS: number; restS: number; peakPpm: number; troughPpm: number }

function heldTrack(record: CleanRecord): { timeS: number[]; ppm: number[] } {
  const timeS: number[] = []
  const ppm: number[] = []
  for (let i = 0; i < record.timeS.length; i++) {
    const next = record.timeS[i + 1] ?? record.timeS[i]!
    const until = Math.min(next, record.timeS[i]! + 12 * 3600)
    for (let t = record.timeS[i]!; t <= until - (t > record.timeS[i]! ? 300 : 0); t += 600) {
      timeS.push(t)
      ppm.push(record.ppm[i]!)
    }
  }
  return { timeS, ppm }
}

/** The coarse track of a record between two instants. */
export function levelTrack(record: CleanRecord, fromS: number, toS: number): Track {
  if (record.onChange) {
    const held = heldTrack(record)
    const inside = held.timeS.map((t, i) => ({ t, i })).filter(({ t }) => t >= fromS && t <= toS)
    return {
      timeS: Float64Array.from(inside, ({ t }) => t),
      ppm: Float64Array.from(inside, ({ i }) => held.ppm[i]!),
      sigmaPpm: Math.max(record.sigmaPpm / 2, record.deadbandPpm / 2),
    }
  }
  const bins = binRecord(record, fromS, toS, Math.max(DETECTION.binS, record.stepS), fromS)
  const second: number[] = []
  for (let i = 1; i + 1 < bins.ppm.length; i++)
    second.push(Math.abs(bins.ppm[i - 1]! - 2 * bins.ppm[i]! + bins.ppm[i + 1]!))
  const seen = second.length > 12 ? quantile(second, 0.5) * (1.4826 / Math.sqrt(6)) : 0
  const formal = quantile(bins.sdPpm, 0.5)
  return {
    timeS: bins.timeH.map((h) => fromS + h * 3600),
    ppm: bins.ppm,
    sigmaPpm: Math.max(formal, Math.min(seen, 3 * formal)),
  }
}

/** Every fall of at least the noise's prominence. A fall starts where the level last stood near its peak, at most five minutes before. */
export function findFalls(track: Track): Fall[] {
  const prominence = Math.max(DETECTION.prominencePpm, DETECTION.prominenceSigmas * track.sigmaPpm)
  const falls: Fall[] = []
  let peak = 0
  let trough = 0
  let falling = false
  const close = (from: number, to: number) => {
    const { timeS, ppm } = track
    let start = from
    for (let i = from; i < to && ppm[i]! > ppm[from]! - prominence / 2; i++) start = i
    let end = to
    for (let i = to; i < timeS.length && ppm[i]! < ppm[to]! + prominence / 2; i++) {
      if (i > to && timeS[i]! - timeS[i - 1]! > DETECTION.silenceS) break
      end = i
    }
    const fromS = Math.max(timeS[from]!, timeS[start]! - 300)
    if (ppm[from]! - ppm[to]! < DETECTION.leastDropPpm) return
    // a level that stays low for hours has a trough anywhere in it
    const restS = timeS[end]!
    const toS = restS - timeS[to]! > 2 * 3600 ? restS : timeS[to]!
    falls.push({ fromS, toS, restS, peakPpm: ppm[from]!, troughPpm: ppm[to]! })
  }
  for (let i = 1; i < track.ppm.length; i++) {
    const value = track.ppm[i]!
    // a long silence hides what happened: nothing is read across it
    if (track.timeS[i]! - track.timeS[i - 1]! > DETECTION.silenceS) {
      if (falling) close(peak, trough)
      falling = false
      peak = i
    } else if (falling) {
      if (value < track.ppm[trough]!) trough = i
      else if (value > track.ppm[trough]! + prominence) {
        close(peak, trough)
        falling = false
        peak = i
      }
    } else if (value >= track.ppm[peak]!) peak = i
    else if (value < track.ppm[peak]! - prominence) {
      falling = true
      trough = i
    }
  }
  if (falling && track.ppm.length > 0) close(peak, trough)
  return falls
}

/** The ends of a run: what is cut off because it does not belong to the same decay. */
import { sliceBins } from './bins'
import { longRunScale } from './noise'
import type { Piece } from './pieces'
import { type Binned, fitPiecewise, type PiecewiseFit, type Prior } from './piecewise'
import { hingeScores } from './segments'

/** Left out after the last person left (practice: ten minutes at most; the rest is found from the readings). */
const SETTLING_S = 180
/** How sure a slow beginning must be to be cut, standard deviations. */
const TRIM_SIGMAS = 2.4
/** At most so many time constants are cut at the start. */
const TRIM_CONSTANTS = 0.8
export type Run = {
  data: Binned
  pieces: readonly Piece[]
  prior: Prior
  originS: number
  stepS: number
  openEnd: boolean
}

/** Fits the rates of a run to a part of its readings. */
export function fitRun(run: Run, part: Binned, breaksH: readonly number[]): PiecewiseFit | null {
  const { pieces, prior } = run
  const start = {
    logStartExcess: Math.log(Math.max(1, pieces[0]!.startExcessPpm)),
    ratesPerHour: pieces.map((piece) => piece.ratePerHour),
    backgroundPpm: prior.ppm,
  }
  return fitPiecewise(part, part.timeH[0]!, breaksH, prior, start)
}

/**
 * Cuts a window's ends where the rate there differs from the rest of the window by less than a break would need: people go one by one, so that
 * a slow beginning is likely and cheap to leave out; and somebody who comes back slows the end.
 */
export function trimEnds(run: Run, part: Binned, breaksH: readonly number[]): Binned {
  const { pieces, prior } = run
  let kept = part
  for (let round = 0; round < 4; round++) {
    const fit = fitRun(run, kept, breaksH)
    if (!fit) return kept
    const variance = Math.max(0.5, longRunScale(fit, kept).variance)
    const scores = hingeScores(kept, fit, prior)
    const first = breaksH[0] ?? part.timeH[part.timeH.length - 1]!
    const mostH = Math.min(
      0.5 * (first - part.timeH[0]!),
      TRIM_CONSTANTS / Math.max(0.05, pieces[0]!.ratePerHour),
    )
    const limitH = part.timeH[0]! + mostH
    let at = -1
    for (let i = 1; i < scores.length && kept.timeH[i]! <= limitH; i++)
      if (at < 0 || scores[i]! > scores[at]!) at = i
    const lateAt = run.openEnd && breaksH.length === 0 ? lowestScore(scores, kept) : -1
    const slowStart = at > 0 && scores[at]! > TRIM_SIGMAS * Math.sqrt(variance)
    const slowEnd = lateAt > 0 && scores[lateAt]! < -1.5 * TRIM_SIGMAS * Math.sqrt(variance)
    if (!slowStart && !slowEnd) return kept
    const next = slowStart
      ? sliceBins(kept, kept.timeH[at]!, Number.POSITIVE_INFINITY)
      : sliceBins(kept, 0, kept.timeH[lateAt]!)
    if (next.timeH.length < 6) return kept
    kept = next
  }
  return kept
}

/** The bin in the last third at which slowing down is most likely. */
function lowestScore(scores: Float64Array, data: Binned): number {
  let at = -1
  for (let i = Math.floor(0.6 * data.timeH.length); i < scores.length - 1; i++)
    if (at < 0 || scores[i]! < scores[at]!) at = i
  return at
}

/** Seconds to leave out at the start for the sensor's lag and for mixing, short of a sixth of a time constant. */
export function settlingH(run: Run): number {
  const rate = Math.max(0.1, run.pieces[0]!.ratePerHour)
  return Math.min(SETTLING_S / 3600, 0.16 / rate)
}

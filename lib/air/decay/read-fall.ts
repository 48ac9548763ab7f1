/** One fall read from beginning to end: segmented, its pieces named, every empty run fitted. */
import { BACKGROUND, DETECTION } from '@/lib/air/constants'
import type { Background } from '@/lib/air/types'
import { median } from '@/lib/math/robust'
import { binRecord, sliceBins } from './bins'
import type { CleanRecord } from './clean'
import type { Fall } from './falls'
import { type RateEstimate, rateEstimate, residualSd, reweighed } from './interval'
import { withMixing } from './noise'
import { assignRoles, emptyRuns, type Piece, piecesOf } from './pieces'
import { type Binned, fitPiecewise, type PiecewiseFit, type Prior, startFrom } from './piecewise'
import { segmentFall } from './segments'

/** One rate over one stretch of an empty room. */
export type Reading = {
  fromS: number
  toS: number
  piece: Piece
  /** which rate of the fit */
  index: number
  estimate: RateEstimate
  fit: PiecewiseFit
  data: Binned
  /** seconds; the rate changed at this window's end (or start) */
  changeAtEnd: { atS: number; lowS: number; highS: number } | null
  changeAtStart: { atS: number; lowS: number; highS: number } | null
}

export type FallReading = {
  fall: Fall
  lastPersonLeftS: number | null
  readings: Reading[]
  peopleInside: boolean
  pieces: Piece[]
  data: Binned
  prior: Prior
}

/** Where a fall may end: a while after the level has come within noise of the background. */
export function usefulEnd(record: CleanRecord, fall: Fall, background: Background): number {
  const start = fall.peakPpm - background.ppm
  const floor = Math.max(8, 0.03 * start, 1.2 * record.sigmaPpm)
  const width = Math.max(300, record.stepS)
  const coarse = binRecord(record, fall.fromS, fall.toS, width, fall.fromS)
  for (let i = 0; i < coarse.timeH.length; i++) {
    const next = coarse.ppm[Math.min(i + 1, coarse.ppm.length - 1)]!
    if (coarse.ppm[i]! - background.ppm < floor && next - background.ppm < floor) {
      const elapsed = coarse.timeH[i]!
      return Math.min(fall.toS, fall.fromS + (elapsed * 1.15 + 0.1) * 3600, fall.fromS + 14 * 3600)
    }
  }
  return Math.min(fall.toS, fall.fromS + 14 * 3600)
}

function changeInterval(data: Binned, fit: PiecewiseFit, prior: Prior, index: number, originS: number) {
  const at = fit.breaksH[index]!
  const inside: number[] = []
  const limit = fit.chiSquared + 4.5
  const start = startFrom(fit)
  for (const direction of [-1, 1]) {
    let reach = at
    for (let i = 0; i < data.timeH.length; i++) {
      const k = direction > 0 ? i : data.timeH.length - 1 - i
      const t = data.timeH[k]!
      if (direction > 0 ? t <= reach : t >= reach) continue
      const breaks = fit.breaksH.map((b, j) => (j === index ? t : b))
      if (breaks.some((b, j) => j > 0 && b <= breaks[j - 1]!)) break
      const trial = fitPiecewise(data, fit.fromH, breaks, prior, start, 6)
      reach = t
      if (!trial || trial.chiSquared > limit) break
    }
    inside.push(reach)
  }
  return {
    atS: originS + at * 3600,
    lowS: originS + Math.min(...inside) * 3600,
    highS: originS + Math.max(...inside) * 3600,
  }
}

/** Fits one empty run jointly: every piece its own rate, one background. */
function readRun(
  data: Binned,
  pieces: readonly Piece[],
  prior: Prior,
  originS: number,
  stepS: number,
): Reading[] {
  const fromH = pieces[0]!.fromH
  const part = sliceBins(data, fromH, pieces[pieces.length - 1]!.toH)
  if (part.timeH.length < pieces.length + 3) return []
  const breaksH = pieces.slice(1).map((piece) => piece.fromH)
  const start = {
    logStartExcess: Math.log(Math.max(1, pieces[0]!.startExcessPpm)),
    ratesPerHour: pieces.map((piece) => piece.ratePerHour),
    backgroundPpm: prior.ppm,
  }
  const fit = fitPiecewise(part, part.timeH[0]!, breaksH, prior, start)
  if (!fit) return []
  const weighed = reweighed(part, fit, prior)
  const scaled = { ...part, sdPpm: part.sdPpm.map((sd) => sd * weighed.factor) }
  const changes = breaksH.map((_, k) => changeInterval(scaled, weighed.fit, prior, k, originS))
  return pieces.map((piece, k) => ({
    fromS: originS + piece.fromH * 3600,
    toS: originS + piece.toH * 3600,
    piece,
    index: k,
    estimate: rateEstimate(weighed, k, residualSd(part, weighed.fit), stepS),
    fit: weighed.fit,
    data: part,
    changeAtStart: changes[k - 1] ?? null,
    changeAtEnd: changes[k] ?? null,
  }))
}

/** Reads one fall with a background. Null when it holds too few readings to say anything. */
export function readFall(record: CleanRecord, fall: Fall, background: Background): FallReading | null {
  const toS = usefulEnd(record, fall, background)
  const width = Math.max(record.stepS, (toS - fall.fromS) / DETECTION.fitBins)
  const raw = binRecord(record, fall.fromS, toS, width, fall.fromS)
  if (raw.timeH.length < 4) return null
  const data = withMixing(raw, background.ppm, width)
  const prior = {
    ppm: background.ppm,
    sdPpm: background.standardUncertaintyPpm,
    driftSdPpmPerHour: BACKGROUND.driftPpmPerHour,
  }
  const leastH = Math.max((2.5 * width) / 3600, 0.06)
  const segmented = segmentFall(data, prior, leastH)
  if (!segmented) return null
  const endH = data.timeH[data.timeH.length - 1]!
  const floorPpm = Math.max(15, 2 * background.standardUncertaintyPpm, 3 * median(data.sdPpm))
  const pieces = assignRoles(piecesOf(segmented, endH), floorPpm)
  const readings: Reading[] = []
  for (const run of emptyRuns(pieces))
    readings.push(...readRun(data, pieces.slice(run.from, run.to + 1), prior, fall.fromS, record.stepS))
  const firstEmpty = pieces.findIndex((piece) => piece.role === 'empty')
  const left = firstEmpty >= 0 ? fall.fromS + pieces[firstEmpty]!.fromH * 3600 : null
  return { fall, lastPersonLeftS: left, readings, peopleInside: firstEmpty < 0, pieces, data, prior }
}

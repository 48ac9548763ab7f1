/** One fall read from beginning to end: segmented, its pieces named, every empty run fitted. */
import { BACKGROUND, DETECTION } from '@/lib/air/constants'
import type { Background } from '@/lib/air/types'
import { median } from '@/lib/math/robust'
import { binRecord } from './bins'
import type { CleanRecord } from './clean'
import type { Fall } from './falls'
import { withMixing } from './noise'
import { assignRoles, emptyRuns, type Piece, piecesOf } from './pieces'
import { type Binned, type Prior, roughStart } from './piecewise'
import { type Reading, readRun } from './run'
import { segmentFall } from './segments'

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

/** A fall's readings in bins, with the noise that mixing brings, from its start (the origin of time) to `toS`. */
export function fallBins(record: CleanRecord, fall: Fall, toS: number, background: Background): Binned {
  const width = Math.max(record.stepS, (toS - fall.fromS) / DETECTION.fitBins)
  return withMixing(
    binRecord(record, fall.fromS, toS, width, fall.fromS, DETECTION.binGrowth),
    background.ppm,
    record.slowSdPpm,
  )
}

/**
 * How fast the floor of a decay may move: a slow room follows outdoor air only slowly, so that its floor hardly moves while it ebbs; what is left
 * is the sensor's own zero.
 */
function driftFor(data: Binned, backgroundPpm: number): number {
  const rate = roughStart(data, backgroundPpm).ratesPerHour[0]!
  return Math.hypot(BACKGROUND.zeroDriftPpmPerHour, (BACKGROUND.driftPpmPerHour * rate) / (rate + 0.35))
}

/** A slow first window and the faster one after it share the instant of the change, known to about the spacing of breaks. */
function linkRises(readings: Reading[], leastH: number): void {
  readings.forEach((own, k) => {
    const next = readings[k + 1]
    if (!own.piece.slowFirst || !next) return
    const atS = own.breakAtS
    const change = { atS, lowS: atS - leastH * 3600, highS: atS + leastH * 3600 }
    own.changeAtEnd = change
    next.changeAtStart = change
  })
}

/** Reads one fall with a background. Null when it holds too few readings to say anything. */
export function readFall(record: CleanRecord, fall: Fall, background: Background): FallReading | null {
  const toS = usefulEnd(record, fall, background)
  const data = fallBins(record, fall, toS, background)
  if (data.timeH.length < 4) return null
  const prior = {
    ppm: background.ppm,
    sdPpm: background.standardUncertaintyPpm,
    driftSdPpmPerHour: driftFor(data, background.ppm),
  }
  const leastH = Math.max((2.5 * record.stepS) / 3600, 0.06)
  const segmented = segmentFall(data, prior, leastH)
  if (!segmented) return null
  const endH = data.timeH[data.timeH.length - 1]!
  const floorPpm = Math.max(15, 2 * background.standardUncertaintyPpm, 3 * median(data.sdPpm))
  const pieces = assignRoles(piecesOf(segmented, endH), floorPpm)
  const readings: Reading[] = []
  for (const run of emptyRuns(pieces)) {
    const own = pieces.slice(run.from, run.to + 1)
    const openEnd = run.to === pieces.length - 1 && pieces[run.to]!.endExcessPpm > 2 * floorPpm
    readings.push(...readRun({ data, pieces: own, prior, originS: fall.fromS, stepS: record.stepS, openEnd }))
  }
  linkRises(readings, leastH)
  const firstEmpty = pieces.findIndex((piece) => piece.role === 'empty')
  const left = firstEmpty >= 0 ? fall.fromS + pieces[firstEmpty]!.fromH * 3600 : null
  return { fall, lastPersonLeftS: left, readings, peopleInside: firstEmpty < 0, pieces, data, prior }
}

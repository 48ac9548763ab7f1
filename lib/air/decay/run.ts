/** One run of an empty room fitted: its ends trimmed, every piece its own rate, one background. */
import { sliceBins } from './bins'
import type { CoupledFit } from './coupled'
import { type DemandFit, fitDemand } from './demand'
import { type RateEstimate, rateEstimate, residualSd, reweighed } from './interval'
import { longRunScale } from './noise'
import type { Piece } from './pieces'
import {
  type Binned,
  fitPiecewise,
  type PiecewiseFit,
  type Prior,
  piecewiseExcess,
  startFrom,
} from './piecewise'
import { hingeScores } from './segments'

/** Left out after the last person left (practice: ten minutes at most; the rest is found from the readings). */
const SETTLING_S = 180
/** How sure a slow beginning must be to be cut, standard deviations. */
const TRIM_SIGMAS = 2.4
/** At most so many time constants are cut at the start. */
const TRIM_CONSTANTS = 0.8
/** How much worse than steps demand control may fit and still be taken, in chi squared: the smooth law is the likelier one. */
const DEMAND_MARGIN = 2
/** Gain in chi squared that demand control must bring over one rate. */
const GRADUAL_GAIN = 7

/** One rate over one stretch of an empty room. */
export type Reading = {
  fromS: number
  toS: number
  piece: Piece
  /** where the last piece of the run ended before it was trimmed */
  breakAtS: number
  /** which rate of the fit */
  index: number
  estimate: RateEstimate
  fit: PiecewiseFit
  data: Binned
  /** set when the rate follows CO2: the figure is then the rate at the occupied end */
  demand: DemandFit | null
  /** set when a measured neighbour's air was taken into account */
  coupled?: CoupledFit
  /** seconds; the rate changed at this window's end (or start) */
  changeAtEnd: { atS: number; lowS: number; highS: number } | null
  changeAtStart: { atS: number; lowS: number; highS: number } | null
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
      const trial = fitPiecewise(data, fit.fromH, breaks, prior, start, 4, 1e-2)
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

export type Run = {
  data: Binned
  pieces: readonly Piece[]
  prior: Prior
  originS: number
  stepS: number
  openEnd: boolean
}

function fitRun(run: Run, part: Binned, breaksH: readonly number[]): PiecewiseFit | null {
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
function trimEnds(run: Run, part: Binned, breaksH: readonly number[]): Binned {
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
function settlingH(run: Run): number {
  const rate = Math.max(0.1, run.pieces[0]!.ratePerHour)
  return Math.min(SETTLING_S / 3600, 0.16 / rate)
}

/** Fits one empty run jointly: every piece its own rate, one background. */
export function readRun(run: Run): Reading[] {
  const { data, pieces, prior, originS, stepS } = run
  const lastH = pieces[pieces.length - 1]!.toH
  const whole = sliceBins(data, pieces[0]!.fromH + settlingH(run), lastH)
  if (whole.timeH.length < pieces.length + 3) return []
  const breaksH = pieces.slice(1).map((piece) => piece.fromH)
  const part = trimEnds(run, whole, breaksH)
  const fit = fitRun(run, part, breaksH)
  if (!fit) return []
  const weighed = reweighed(part, fit, prior)
  const demand = slowsDown(weighed.fit)
    ? demandOf(part, prior, fit)
    : bendsDown(weighed.fit, part, prior)
      ? gradualDemand(part, prior, fit)
      : null
  if (demand) return [demandReading(run, part, weighed, demand)]
  const scaled = { ...part, sdPpm: part.sdPpm.map((sd) => sd * weighed.factor) }
  const changes = breaksH.map((_, k) => changeInterval(scaled, weighed.fit, prior, k, originS))
  const fitted = refreshed(pieces, weighed.fit, part)
  return fitted.map((piece, k) => ({
    fromS: originS + piece.fromH * 3600,
    toS: originS + (k === fitted.length - 1 ? usedUntil(piece) : piece.toH) * 3600,
    piece,
    breakAtS: originS + lastH * 3600,
    index: k,
    estimate: rateEstimate(weighed, k, residualSd(part, weighed.fit), stepS),
    fit: weighed.fit,
    data: part,
    demand: null,
    changeAtStart: changes[k - 1] ?? null,
    changeAtEnd: changes[k] ?? null,
  }))
}

const slowsDown = (fit: PiecewiseFit) =>
  fit.ratesPerHour.length > 1 &&
  fit.ratesPerHour.every((rate, k) => k === 0 || rate < fit.ratesPerHour[k - 1]!)

/** Demand control, when it explains the readings about as well as steps do; a step that is really sharp is a step. */
function demandOf(part: Binned, prior: Prior, steps: PiecewiseFit): DemandFit | null {
  const demand = fitDemand(part, prior, steps)
  if (!demand || demand.startRatePerHour < 1.25 * demand.endRatePerHour) return null
  const spare = 2 * (steps.breaksH.length * 2 - 1)
  const variance = longRunScale(steps, part).variance
  return demand.chiSquared < steps.chiSquared + (spare + DEMAND_MARGIN) * variance ? demand : null
}

/** Until when the rate is still near that of the occupied end: it has fallen to six tenths, at least ten minutes on. */
function occupiedEnd(demand: DemandFit, fromH: number, toH: number): number {
  for (let t = 0.02; fromH + t < toH; t += 0.02) {
    if (demand.rateAfter(t) < 0.6 * demand.startRatePerHour) return fromH + Math.max(t, 1 / 6)
  }
  return toH
}

/** One rate fits, yet the readings would rather have it fall: worth asking whether it follows CO2. */
function bendsDown(fit: PiecewiseFit, part: Binned, prior: Prior): boolean {
  if (
    fit.ratesPerHour.length > 1 ||
    fit.ratesPerHour[0]! * (part.timeH[part.timeH.length - 1]! - part.timeH[0]!) < 1
  )
    return false
  return hingeScores(part, fit, prior).some((score) => score < -2)
}

/** Demand control that a single rate hides: clearly better, and the rate falls by a third or more. */
function gradualDemand(part: Binned, prior: Prior, one: PiecewiseFit): DemandFit | null {
  const demand = fitDemand(part, prior, one)
  if (!demand || demand.startRatePerHour < 1.5 * demand.endRatePerHour) return null
  return demand.chiSquared < one.chiSquared - GRADUAL_GAIN * Math.max(1, longRunScale(one, part).variance)
    ? demand
    : null
}

function demandReading(
  run: Run,
  part: Binned,
  weighed: ReturnType<typeof reweighed>,
  demand: DemandFit,
): Reading {
  const { pieces, originS, stepS } = run
  const fromH = part.timeH[0]!
  const toH = part.timeH[part.timeH.length - 1]!
  const estimate = rateEstimate(weighed, 0, residualSd(part, weighed.fit), stepS)
  const piece = {
    ...pieces[0]!,
    fromH,
    toH,
    ratePerHour: demand.startRatePerHour,
    startExcessPpm: demand.startExcessPpm,
    endExcessPpm: Math.max(1, part.ppm[part.ppm.length - 1]! - demand.backgroundPpm),
  }
  return {
    fromS: originS + fromH * 3600,
    toS: originS + occupiedEnd(demand, fromH, toH) * 3600,
    piece,
    breakAtS: originS + toH * 3600,
    index: 0,
    estimate: {
      ...estimate,
      ratePerHour: demand.startRatePerHour,
      lowPerHour: demand.startLowPerHour,
      highPerHour: demand.startHighPerHour,
    },
    fit: weighed.fit,
    data: part,
    demand,
    changeAtStart: null,
    changeAtEnd: null,
  }
}

/** The pieces with the rates and levels of the final fit. */
function refreshed(pieces: readonly Piece[], fit: PiecewiseFit, part: Binned): Piece[] {
  return pieces.map((piece, k) => {
    const fromH = k === 0 ? part.timeH[0]! : piece.fromH
    const toH = k === pieces.length - 1 ? part.timeH[part.timeH.length - 1]! : piece.toH
    return {
      ...piece,
      fromH,
      toH,
      ratePerHour: fit.ratesPerHour[k]!,
      startExcessPpm: piecewiseExcess(fit, fromH),
      endExcessPpm: piecewiseExcess(fit, toH),
    }
  })
}

/** Until when a piece speaks of its rate: after two and a half time constants it only speaks of the background. */
function usedUntil(piece: Piece): number {
  return piece.ratePerHour > 0 ? Math.min(piece.toH, piece.fromH + 2.5 / piece.ratePerHour) : piece.toH
}

/** One run of an empty room fitted: its ends trimmed, every piece its own rate, one background. */
import { sliceBins } from './bins'
import type { CoupledFit } from './coupled'
import type { DemandFit } from './demand'
import { demandIn, occupiedEnd } from './demand-run'
import { type RateEstimate, rateEstimate, residualSd, reweighed } from './interval'
import type { Piece } from './pieces'
import {
  type Binned,
  fitPiecewise,
  type PiecewiseFit,
  type Prior,
  piecewiseExcess,
  startFrom,
} from './piecewise'
import { fitRun, type Run, settlingH, trimEnds } from './trim'

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
  const demand = demandIn(part, prior, fit, weighed.fit)
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

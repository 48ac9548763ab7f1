/** One window fitted as the hand draws it: the same fit and the same gates as the nightly analysis, fast enough for the browser. */
import { BACKGROUND, DEFAULT_OUTDOOR, DETECTION } from '@/lib/air/constants'
import type { Background, Check, EstimateKind, Quality, Reason, SensorSpec, Series } from '@/lib/air/types'
import { binRecord } from './bins'
import { type CleanRecord, cleanRecord } from './clean'
import { explainDecay } from './explain'
import { rateEstimate, residualSd, reweighed } from './interval'
import { judgeReading } from './judge'
import { withMixing } from './noise'
import { type Binned, backgroundAt, fitPiecewise, type Prior, roughStart } from './piecewise'
import type { Reading } from './run'

export type RefitInput = {
  series: Series
  fromS: number
  toS: number
  /** null: the dated default */
  background: Background | null
  sensor?: SensorSpec
}

/**
 * What the window gives. The fitted course is
 * `background.ppm + driftPpmPerHour (t - middleS) / 3600 + excessAtStartPpm exp(-ratePerHour (t - startS) / 3600)`; background is the one of the
 * middle of the window. Everything is null in a window that gives no fit.
 */
export type Refit = {
  startS: number
  endS: number
  middleS: number
  kind: EstimateKind
  ratePerHour: number | null
  lowPerHour: number | null
  highPerHour: number | null
  excessAtStartPpm: number | null
  background: Background | null
  driftPpmPerHour: number
  quality: Quality
  reasons: Reason[]
  checks: Check[]
  points: number
  lagOneCorrelation: number | null
  effectivePoints: number | null
  residualSdPpm: number | null
  uncertaintyParts: { regression: number; background: number; model: number } | null
  sentence: string
}

/** Shortest window that is fitted, seconds. */
const SHORTEST_S = 240

function nothing(input: RefitInput, reasons: Reason[], points: number): Refit {
  const startS = input.fromS
  const endS = input.toS
  const refit = {
    startS,
    endS,
    middleS: (startS + endS) / 2,
    kind: 'fit' as const,
    ratePerHour: null,
    lowPerHour: null,
    highPerHour: null,
    excessAtStartPpm: null,
    background: input.background,
    driftPpmPerHour: 0,
    quality: 'refused' as const,
    reasons,
    checks: [],
    points,
    lagOneCorrelation: null,
    effectivePoints: null,
    residualSdPpm: null,
    uncertaintyParts: null,
  }
  return { ...refit, sentence: sentenceOf(refit) }
}

function sentenceOf(refit: Omit<Refit, 'sentence'>): string {
  return explainDecay({
    kind: refit.kind,
    quality: refit.quality,
    reasons: refit.reasons,
    mode: 'unknown',
    airChangeRatePerHour: refit.ratePerHour,
    airChangeRateLowPerHour: refit.lowPerHour,
    airChangeRateHighPerHour: refit.highPerHour,
  })
}

/** The readings around a window only: a whole day need not be cleaned for every move of the hand. */
function nearby(series: Series, fromS: number, toS: number): Series {
  const margin = 1800
  let low = 0
  let high = series.timeS.length
  while (low < high && series.timeS[low]! < fromS - margin) low++
  while (high > low && series.timeS[high - 1]! > toS + margin) high--
  return { timeS: series.timeS.subarray(low, high), co2Ppm: series.co2Ppm.subarray(low, high) }
}

function readingOf(record: CleanRecord, data: Binned, prior: Prior, input: RefitInput): Reading | null {
  const first = fitPiecewise(data, data.timeH[0]!, [], prior, roughStart(data, prior.ppm))
  if (!first) return null
  const weighed = reweighed(data, first, prior)
  const { fit } = weighed
  const endH = data.timeH[data.timeH.length - 1]!
  const startExcessPpm = Math.exp(fit.logStartExcess)
  const rate = fit.ratesPerHour[0]!
  if (!(rate > 0)) return null
  return {
    fromS: input.fromS,
    toS: input.toS,
    piece: {
      fromH: data.timeH[0]!,
      toH: endH,
      ratePerHour: rate,
      sdPerHour: 0,
      startExcessPpm,
      endExcessPpm: startExcessPpm * Math.exp(-rate * (endH - data.timeH[0]!)),
      role: 'empty',
    },
    breakAtS: input.toS,
    index: 0,
    estimate: rateEstimate(weighed, 0, residualSd(data, fit), record.stepS),
    fit,
    data,
    demand: null,
    changeAtEnd: null,
    changeAtStart: null,
  }
}

/** Fits one window with one rate. Never throws; a window that gives no figure is refused with reasons. Takes a few milliseconds at most. */
export function refitDecay(input: RefitInput): Refit {
  const { fromS, toS } = input
  if (!(toS - fromS >= SHORTEST_S)) return nothing(input, ['too-short'], 0)
  const record = cleanRecord(nearby(input.series, fromS, toS), input.sensor)
  const width = Math.max(record.stepS, (toS - fromS) / DETECTION.fitBins)
  const raw = binRecord(record, fromS, toS, width, fromS, DETECTION.binGrowth)
  if (raw.timeH.length < 4) return nothing(input, ['too-few-points'], raw.timeH.length)
  const background: Background = input.background ?? {
    ppm: DEFAULT_OUTDOOR.ppm,
    standardUncertaintyPpm: Math.hypot(DEFAULT_OUTDOOR.standardUncertaintyPpm, BACKGROUND.sensorOffsetPpm),
    origin: 'default',
  }
  const prior = {
    ppm: background.ppm,
    sdPpm: Math.max(BACKGROUND.leastPpm, background.standardUncertaintyPpm),
    driftSdPpmPerHour: BACKGROUND.driftPpmPerHour,
  }
  const data = withMixing(raw, background.ppm)
  const reading = readingOf(record, data, prior, input)
  if (!reading) return nothing(input, ['too-slow'], raw.timeH.length)
  return refitOf(input, reading, record, background)
}

function refitOf(input: RefitInput, reading: Reading, record: CleanRecord, background: Background): Refit {
  const verdict = judgeReading(reading, record, background, { doubts: [], refusals: [], floorsAgree: true })
  const { estimate, fit, piece } = reading
  const given = verdict.quality !== 'refused'
  const middleH = (piece.fromH + piece.toH) / 2
  const figure = given && (verdict.kind === 'fit' || verdict.kind === 'range')
  const refit = {
    startS: input.fromS + piece.fromH * 3600,
    endS: input.toS,
    middleS: input.fromS + middleH * 3600,
    kind: verdict.kind,
    ratePerHour: figure ? estimate.ratePerHour : null,
    lowPerHour: given && verdict.kind !== 'at-most' ? estimate.lowPerHour : null,
    highPerHour: given && verdict.kind !== 'at-least' ? estimate.highPerHour : null,
    excessAtStartPpm: piece.startExcessPpm,
    background: { ...background, ppm: backgroundAt(fit, middleH) },
    driftPpmPerHour: fit.driftPpmPerHour,
    quality: verdict.quality,
    reasons: verdict.reasons,
    checks: verdict.checks,
    points: reading.data.timeH.length,
    lagOneCorrelation: estimate.lagOne,
    effectivePoints: estimate.effectivePoints,
    residualSdPpm: estimate.residualSdPpm,
    uncertaintyParts: estimate.parts,
  }
  return { ...refit, sentence: sentenceOf(refit) }
}

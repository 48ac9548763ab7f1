/** A window chosen by hand, fitted with the code of the nightly analysis: pure and quick enough to follow the hand. */
import { BACKGROUND, DETECTION } from '@/lib/air/constants'
import type { Background, Check, EstimateKind, Quality, Reason, SensorSpec, Series } from '@/lib/air/types'
import { binRecord } from './bins'
import { cleanRecord } from './clean'
import { explainDecay } from './explain'
import { rateEstimate, reweighed } from './interval'
import { judgeReading } from './judge'
import { withMixing } from './noise'
import {
  backgroundAt,
  fitPiecewise,
  type PiecewiseFit,
  piecewiseExcess,
  piecewiseValue,
  roughStart,
} from './piecewise'
import type { Reading } from './read-fall'

export type RefitInput = {
  series: Series
  fromS: number
  toS: number
  background: Background | null
  sensor?: SensorSpec
}

/** Curve: ppm(t) = background.ppm + excessAtStartPpm · exp(−ratePerHour · (t − startS) / 3600). Refused: every rate null. */
export type Refit = {
  quality: Quality
  kind: EstimateKind
  reasons: Reason[]
  ratePerHour: number | null
  lowPerHour: number | null
  highPerHour: number | null
  background: Background | null
  startS: number
  excessAtStartPpm: number | null
  lagOneCorrelation: number | null
  effectivePoints: number | null
  residualSdPpm: number | null
  points: number
  uncertaintyParts: { regression: number; background: number; model: number } | null
  checks: Check[]
  sentence: string
}

/** Share of the rate that another window as defensible would move it (standard uncertainty of ln A). */
const WINDOW_CHOICE = 0.008

/** Background of a window for which none was found: where lower-CO2 air usually lies, and wide. */
const UNKNOWN: Background = { ppm: 430, standardUncertaintyPpm: 25, origin: 'default' }

function refused(input: RefitInput, points: number): Refit {
  const reasons: Reason[] = ['too-few-points']
  return {
    quality: 'refused',
    kind: 'fit',
    reasons,
    ratePerHour: null,
    lowPerHour: null,
    highPerHour: null,
    background: input.background,
    startS: input.fromS,
    excessAtStartPpm: null,
    lagOneCorrelation: null,
    effectivePoints: null,
    residualSdPpm: null,
    points,
    uncertaintyParts: null,
    checks: [],
    sentence: `No figure: the window holds ${points === 1 ? 'one reading' : `${points} readings`}, too few to fit.`,
  }
}

/**
 * Fits one constant rate to the window with the background as given (a prior with its uncertainty) and judges it by the gates of the
 * nightly analysis. Deterministic. What a hand chose is not tested for people: the person who chose it answers for that.
 */
export function refitDecay(input: RefitInput): Refit {
  const { fromS, toS } = input
  const background = input.background ?? UNKNOWN
  const record = cleanRecord(input.series, input.sensor)
  const width = Math.max(record.stepS, (toS - fromS) / DETECTION.fitBins)
  const raw = binRecord(record, fromS, toS, width, fromS)
  if (raw.timeH.length < 4) return refused(input, raw.timeH.length)
  const data = withMixing(raw, background.ppm, width)
  const prior = {
    ppm: background.ppm,
    sdPpm: background.standardUncertaintyPpm,
    driftSdPpmPerHour: BACKGROUND.driftPpmPerHour,
  }
  const first = fitPiecewise(data, data.timeH[0]!, [], prior, roughStart(data, background.ppm))
  if (!first) return refused(input, raw.timeH.length)
  const weighed = reweighed(data, first, prior)
  const { fit } = weighed
  const estimate = rateEstimate(weighed, 0, WINDOW_CHOICE, residualSd(data, fit))
  const endH = data.timeH[data.timeH.length - 1]!
  const reading: Reading = {
    fromS,
    toS,
    piece: {
      fromH: fit.fromH,
      toH: endH,
      ratePerHour: estimate.ratePerHour,
      sdPerHour: estimate.parts.regression * estimate.ratePerHour,
      startExcessPpm: piecewiseExcess(fit, fit.fromH),
      endExcessPpm: piecewiseExcess(fit, endH),
      role: 'empty',
    },
    index: 0,
    estimate,
    fit,
    data,
    changeAtEnd: null,
    changeAtStart: null,
  }
  const verdict = judgeReading(reading, record, background, { doubts: [], refusals: [] })
  const given = verdict.quality !== 'refused'
  const rates = {
    airChangeRatePerHour: given && verdict.kind === 'fit' ? estimate.ratePerHour : null,
    airChangeRateLowPerHour: given && verdict.kind !== 'at-most' ? estimate.lowPerHour : null,
    airChangeRateHighPerHour: given && verdict.kind !== 'at-least' ? estimate.highPerHour : null,
  }
  return {
    quality: verdict.quality,
    kind: verdict.kind,
    reasons: verdict.reasons,
    ratePerHour: rates.airChangeRatePerHour,
    lowPerHour: rates.airChangeRateLowPerHour,
    highPerHour: rates.airChangeRateHighPerHour,
    background: {
      ppm: backgroundAt(fit, (fit.fromH + endH) / 2),
      standardUncertaintyPpm: background.standardUncertaintyPpm,
      origin: background.origin,
    },
    startS: fromS + fit.fromH * 3600,
    excessAtStartPpm: piecewiseExcess(fit, fit.fromH),
    lagOneCorrelation: estimate.lagOne,
    effectivePoints: estimate.effectivePoints,
    residualSdPpm: estimate.residualSdPpm,
    points: data.timeH.length,
    uncertaintyParts: estimate.parts,
    checks: verdict.checks,
    sentence: explainDecay({
      kind: verdict.kind,
      quality: verdict.quality,
      reasons: verdict.reasons,
      mode: 'unknown',
      ...rates,
    }),
  }
}

/** Root mean square distance between readings and fit, ppm. */
function residualSd(data: { timeH: Float64Array; ppm: Float64Array }, fit: PiecewiseFit): number {
  let sum = 0
  for (let i = 0; i < data.timeH.length; i++) sum += (data.ppm[i]! - piecewiseValue(fit, data.timeH[i]!)) ** 2
  return Math.sqrt(sum / Math.max(1, data.timeH.length - 3))
}

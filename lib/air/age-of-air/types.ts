/** A sample of tracer: seconds from the step (negative before it) and concentration in any unit, the same throughout a test. */
export type Sample = readonly [timeS: number, concentration: number]

/** One planned tracer test of one room. */
export type TracerTest = {
  kind: 'step-up' | 'decay'
  volumeM3: number
  /** supplied flow where known, L/s: only to check the exhaust's record against */
  supplyLps?: number
  /** concentration of the replacement air */
  background: number
  /** standard uncertainty of the background; default a quarter of the noise and 0.2 % of the step (0.05 % when the background is 0) */
  backgroundStandardUncertainty?: number
  /** decay: uniform concentration before the step; default the mean of samples at t ≤ 0 */
  initial?: number
  /** step-up: final concentration; default fitted */
  steady?: number
  /** record in the exhaust; without it there is no nominal time from the tracer, no room mean age and no efficiency */
  exhaust: readonly Sample[] | null
  points: Readonly<Record<string, readonly Sample[]>>
}

/** A figure with its 95 % limits. */
export type Estimate = { value: number; low: number; high: number }

export const TRACER_WARNINGS = [
  'initial-after-step',
  'non-uniform-start',
  'short-circuit',
  'tail-share',
  'no-decaying-tail',
  'steady-not-reached',
  'recirculation',
  'supply-mismatch',
  'local-only',
] as const
export type TracerWarning = (typeof TRACER_WARNINGS)[number]

export type PointAges = { localMeanAgeS: Estimate | null; localIndex: Estimate | null }

export type TracerResult = {
  nominalTimeS: Estimate | null
  roomMeanAgeS: Estimate | null
  /** nominal time / room mean age: 1 complete mixing, 2 ideal displacement (coefficient of air-change performance, not Ez) */
  effectivenessCoefficient: Estimate | null
  airChangeEfficiencyPct: Estimate | null
  points: Record<string, PointAges>
  /** share of the first moment (exhaust; else of the worst point's age) that lies beyond the record, in the fitted exponential tail */
  tailShare: number | null
  warnings: TracerWarning[]
}

/** Each warning in one plain sentence. */
export const TRACER_WARNING_SENTENCES: Record<TracerWarning, string> = {
  'initial-after-step':
    'No sample before the step was given, so the first one after it stands for the start; a short circuit would stay hidden.',
  'non-uniform-start':
    'Concentrations differed between places before the step by more than 10 %; ages from a decay need a uniform start.',
  'short-circuit':
    'The exhaust fell at once by more than noise explains: part of the supply leaves without mixing. Normalised by the level before the step.',
  'tail-share': 'More than a quarter of the result lies beyond the end of the record; measure longer.',
  'no-decaying-tail':
    'The end of a record does not approach its final level, so no age can be taken from it.',
  'steady-not-reached': 'The final level was not reached and is extrapolated; measure longer or give it.',
  recirculation:
    'The record levels off above its final value: tracer comes back with recirculated air, or the background is wrong.',
  'supply-mismatch':
    'The nominal time from the exhaust does not agree with volume over supplied flow: volume, flow, or a second way out is wrong.',
  'local-only':
    'Without a record in the exhaust only local ages can be given; a wall sensor speaks for its own place.',
}

import { type Curve, curveOf, noiseOf, tidy } from './curve'
import { fitSteady } from './steady'
import type { Sample, TracerTest, TracerWarning } from './types'

/** A test brought to shares of old air, ready for the moments. */
export type NormalisedTest = {
  exhaust: Curve | null
  points: Record<string, Curve>
  /** size of the step (initial or steady less background) and its relative standard uncertainty */
  step: number
  stepDoubt: number
  /** standard uncertainty of a share from the background */
  backgroundDoubt: number
  /** standard uncertainty of a share near zero: the background's in a decay, with the final level's in a step-up */
  floorDoubt: number
  warnings: Set<TracerWarning>
}

/** Replaces the background or the size of the step, to learn what their doubts do. */
export type Override = { backgroundShift?: number; stepFactor?: number }

type Level = { value: number; standardUncertainty: number }

const before = (samples: readonly Sample[]) =>
  samples.filter(([timeS]) => timeS <= 0).map(([, value]) => value)
const meanOf = (values: readonly number[]) => values.reduce((sum, value) => sum + value, 0) / values.length

/** A poorly known final level widens the interval, but does not throw more of the record away than this. */
const MOST_FLOOR_DOUBT = 0.008

/** Places whose level before the step may differ by this share of the step (ASTM E741's 10 % uniformity, from memory). */
const UNIFORMITY = 0.1

/** A sample at t = 0 exactly may already show the drop of a short circuit; beside earlier samples that disagree it does not count. */
function preStep(samples: readonly Sample[], noise: number): number[] {
  const values = before(samples)
  const earlier = samples.filter(([timeS]) => timeS < 0).map(([, value]) => value)
  if (earlier.length < 2 || values.length === earlier.length) return values
  const mean = meanOf(earlier)
  const atStep = values[values.length - 1]!
  return Math.abs(atStep - mean) > Math.max(5 * noise, 0.02 * Math.abs(mean)) ? earlier : values
}

function initialLevel(
  test: TracerTest,
  records: readonly (readonly Sample[])[],
  warnings: Set<TracerWarning>,
): Level {
  const noises = records.map((samples) => noiseOf(samples.filter(([t]) => t > 0).map(([, value]) => value)))
  const starts = records.map((samples, i) => preStep(samples, noises[i]!))
  const means = starts.filter((values) => values.length > 0).map(meanOf)
  const all = starts.flat()
  const size = Math.abs((test.initial ?? meanOf(all.length > 0 ? all : [1])) - test.background)
  if (means.length > 1 && means.some((mean) => Math.abs(mean - meanOf(means)) > UNIFORMITY * size)) {
    warnings.add('non-uniform-start')
  }
  const noise = Math.max(...noises)
  if (test.initial !== undefined) return { value: test.initial, standardUncertainty: noise / 3 }
  if (all.length > 0) {
    const spread = means.length > 1 ? Math.max(...means) - Math.min(...means) : 0
    const between = spread / (2 * Math.sqrt(Math.max(1, means.length)))
    return { value: meanOf(all), standardUncertainty: Math.hypot(noise / Math.sqrt(all.length), between) }
  }
  warnings.add('initial-after-step')
  const first = records.map((samples) => samples[0]).find((sample) => sample !== undefined)
  if (!first) throw new RangeError('a tracer test needs at least one sample')
  return { value: first[1], standardUncertainty: noise }
}

function steadyLevel(
  test: TracerTest,
  records: readonly (readonly Sample[])[],
  warnings: Set<TracerWarning>,
): Level {
  if (test.steady !== undefined) return { value: test.steady, standardUncertainty: 0 }
  const fit = fitSteady(records)
  if (!fit) {
    warnings.add('steady-not-reached')
    const last = records[0]?.at(-1)
    if (!last) throw new RangeError('a tracer test needs at least one sample')
    return { value: last[1], standardUncertainty: 0 }
  }
  if (fit.reachedShare < 0.9) warnings.add('steady-not-reached')
  return { value: fit.level, standardUncertainty: fit.standardUncertainty }
}

function backgroundUncertainty(
  test: TracerTest,
  records: readonly (readonly Sample[])[],
  step: number,
): number {
  if (test.backgroundStandardUncertainty !== undefined) return test.backgroundStandardUncertainty
  const noise = Math.max(...records.map((samples) => noiseOf(samples.map(([, value]) => value))))
  return Math.hypot(noise / 4, (test.background === 0 ? 0.0005 : 0.002) * Math.abs(step))
}

/**
 * Shares of old air F(t) of every record: (C − Cb)/(C0 − Cb) in a decay with C0 the uniform level before the step, 1 − (C − Cb)/(C∞ − Cb)
 * in a step-up. A short circuit shows as F < 1 right after the step, because the level before the step, not the first sample, is the
 * measure.
 * @throws RangeError when the step has no size or a record is empty
 * @source Roulet, Ventilation and Airflow in Buildings, ch. 3, eqs 3.8 to 3.12
 */
export function normaliseTest(test: TracerTest, override: Override = {}): NormalisedTest {
  const warnings = new Set<TracerWarning>()
  const names = Object.keys(test.points)
  const exhaust = test.exhaust ? tidy(test.exhaust) : null
  const points = names.map((name) => tidy(test.points[name]!))
  const records = exhaust ? [exhaust, ...points] : points
  if (records.length === 0) throw new RangeError('a tracer test needs a record in the exhaust or at a point')
  const level =
    test.kind === 'decay' ? initialLevel(test, records, warnings) : steadyLevel(test, records, warnings)
  const plainStep = level.value - test.background
  const background = test.background + (override.backgroundShift ?? 0)
  const step = (level.value - background) * (override.stepFactor ?? 1)
  if (!(Math.abs(plainStep) > 0) || !(Math.abs(step) > 0)) {
    throw new RangeError('the level before the step (decay) or after it (step-up) equals the background')
  }
  const toShare = (value: number) =>
    test.kind === 'decay' ? (value - background) / step : 1 - (value - background) / step
  const curve = (samples: readonly Sample[]) =>
    curveOf(samples.map(([t, value]) => [t, toShare(value)] as const))
  const curves = points.map(curve)
  const exhaustCurve = exhaust ? curve(exhaust) : null
  if (!exhaustCurve) warnings.add('local-only')
  if (exhaustCurve?.jumps) warnings.add(exhaustCurve.share[0]! < 1 ? 'short-circuit' : 'non-uniform-start')
  if (test.kind === 'decay' && curves.some((one) => Math.abs(one.share[0]! - 1) > UNIFORMITY)) {
    warnings.add('non-uniform-start')
  }
  const backgroundSd = backgroundUncertainty(test, records, plainStep)
  const stepDoubt = Math.abs(level.standardUncertainty / plainStep)
  const backgroundDoubt = backgroundSd / Math.abs(plainStep)
  return {
    exhaust: exhaustCurve,
    points: Object.fromEntries(names.map((name, i) => [name, curves[i]!])),
    step,
    stepDoubt,
    backgroundDoubt,
    floorDoubt:
      test.kind === 'decay'
        ? backgroundDoubt
        : Math.hypot(backgroundDoubt, Math.min(stepDoubt, MOST_FLOOR_DOUBT)),
    warnings,
  }
}

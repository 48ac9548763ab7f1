import { type SeededRandom, seededRandom } from '@/lib/math/seeded'
import { noiseOf, tidy } from './curve'
import { type FiguresAndMoments, figuresOf, flatten } from './figures'
import { type NormalisedTest, normaliseTest } from './normalise'
import type { Sample, TracerTest } from './types'

/** Copies of the test with fresh noise; enough for a standard uncertainty to within 9 %. */
const COPIES = 60
const SEED = 20260301

/** Savitzky & Golay 1964, quadratic over seven samples (coefficients from memory, they sum to 1); ends are left as they are. */
const SMOOTH = [-2, 3, 6, 7, 6, 3, -2].map((weight) => weight / 21)

function smoothOf(values: readonly number[]): number[] {
  return values.map((value, i) =>
    i < 3 || i > values.length - 4
      ? value
      : SMOOTH.reduce((sum, weight, k) => sum + weight * values[i - 3 + k]!, 0),
  )
}

type Quiet = { clean: Sample[]; sd: number }

/** A record with its noise smoothed out, and that noise's sd. */
function quietOf(samples: readonly Sample[]): Quiet {
  const clean = tidy(samples)
  const sd = noiseOf(clean.filter(([t]) => t > 0).map(([, value]) => value))
  const start = clean.findIndex(([t]) => t > 0)
  const smooth = smoothOf(clean.slice(start).map(([, value]) => value))
  return { clean: clean.map(([t, value], i) => [t, i < start ? value : smooth[i - start]!] as const), sd }
}

type QuietTest = { exhaust: Quiet | null; points: Record<string, Quiet> }

function noisyCopy(test: TracerTest, quiet: QuietTest, random: SeededRandom): TracerTest {
  const shake = ({ clean, sd }: Quiet): Sample[] =>
    clean.map(([t, value]) => [t, value + sd * random.normal()] as const)
  const points = Object.entries(quiet.points).map(([name, record]) => [name, shake(record)] as const)
  return { ...test, exhaust: quiet.exhaust ? shake(quiet.exhaust) : null, points: Object.fromEntries(points) }
}

/** Sum of squared ln-differences from the base, for figures that exist in both. */
function addDifference(
  into: Map<string, number>,
  base: Map<string, number>,
  other: Map<string, number>,
  weight: number,
) {
  for (const [name, value] of base) {
    const changed = other.get(name) ?? Number.NaN
    if (value > 0 && changed > 0)
      into.set(name, (into.get(name) ?? 0) + weight * Math.log(changed / value) ** 2)
  }
}

/** Noise: variance of ln of each figure among copies of the smoothed record with fresh noise, everything fitted again in each. */
function noiseVariances(test: TracerTest, base: Map<string, number>, noisy: boolean): Map<string, number> {
  const logs = new Map<string, number[]>()
  if (!noisy) return new Map()
  const random = seededRandom(SEED)
  const quiet = {
    exhaust: test.exhaust ? quietOf(test.exhaust) : null,
    points: Object.fromEntries(
      Object.entries(test.points).map(([name, samples]) => [name, quietOf(samples)]),
    ),
  }
  for (let copy = 0; copy < COPIES; copy++) {
    const figures = flatten(figuresOf(normaliseTest(noisyCopy(test, quiet, random))).figures)
    for (const name of base.keys()) {
      const value = figures.get(name) ?? Number.NaN
      if (value > 0) logs.set(name, [...(logs.get(name) ?? []), Math.log(value)])
    }
  }
  return new Map(
    [...logs].map(([name, values]) => {
      const mean = values.reduce((sum, value) => sum + value, 0) / values.length
      const squares = values.reduce((sum, value) => sum + (value - mean) ** 2, 0)
      return [name, squares / Math.max(1, values.length - 1)]
    }),
  )
}

/** What the doubt of every tail's rate is worth. */
function tailVariances(normalised: NormalisedTest, base: Map<string, number>) {
  const variances = new Map<string, number>()
  addDifference(variances, base, flatten(figuresOf(normalised, -1).figures), 0.5)
  addDifference(variances, base, flatten(figuresOf(normalised, 1).figures), 0.5)
  return variances
}

/** Every second sample left out: what the sampling step leaves open (a third of the difference for a second-order rule). */
function thinned(test: TracerTest): TracerTest {
  const half = (samples: readonly Sample[]) => {
    const clean = tidy(samples)
    const start = clean.findIndex(([t]) => t > 0)
    return clean.filter((_, i) => i < start || (i - start) % 2 === 1 || i === clean.length - 1)
  }
  return {
    ...test,
    exhaust: test.exhaust ? half(test.exhaust) : null,
    points: Object.fromEntries(Object.entries(test.points).map(([name, samples]) => [name, half(samples)])),
  }
}

function stepVariances(test: TracerTest, moments: FiguresAndMoments, base: Map<string, number>) {
  const variances = new Map<string, number>()
  addDifference(variances, base, flatten(figuresOf(normaliseTest(thinned(test))).figures), 1 / 9)
  const jump = (moments.exhaust?.jumpDoubt ?? 0) ** 2
  for (const name of ['nominal', 'mean']) variances.set(name, (variances.get(name) ?? 0) + jump)
  for (const [name, one] of Object.entries(moments.points)) {
    variances.set(`age:${name}`, (variances.get(`age:${name}`) ?? 0) + one.jumpDoubt ** 2)
    variances.set(`index:${name}`, (variances.get(`index:${name}`) ?? 0) + one.jumpDoubt ** 2 + jump)
  }
  return variances
}

/**
 * Standard uncertainty of ln of every figure: noise (fresh noise on the record, everything fitted again), background, size of the step
 * (uniform start or final level), tail, and sampling step, added in quadrature (GUM).
 */
export function standardUncertainties(
  test: TracerTest,
  normalised: NormalisedTest,
  moments: FiguresAndMoments,
): Map<string, number> {
  const base = flatten(moments.figures)
  const curves = [normalised.exhaust, ...Object.values(normalised.points)]
  const noisy = curves.some((curve) => (curve?.noise ?? 0) > 1e-6)
  const total = new Map<string, number>()
  const include = (part: Map<string, number>) => {
    for (const [name, value] of part) total.set(name, (total.get(name) ?? 0) + value)
  }
  include(noiseVariances(test, base, noisy))
  include(tailVariances(normalised, base))
  include(stepVariances(test, moments, base))
  const shifted = new Map<string, number>()
  const backgroundShift = normalised.backgroundDoubt * Math.abs(normalised.step)
  for (const sign of [-1, 1]) {
    const background = normaliseTest(test, { backgroundShift: sign * backgroundShift })
    addDifference(shifted, base, flatten(figuresOf(background).figures), 0.5)
    const start = normaliseTest(test, { stepFactor: 1 + sign * normalised.stepDoubt })
    addDifference(shifted, base, flatten(figuresOf(start).figures), 0.5)
  }
  include(shifted)
  return new Map([...total].map(([name, variance]) => [name, Math.sqrt(variance)]))
}

/** Where the rate changes inside a fall: breaks added while they earn their keep, then taken away again while nothing is lost. */
import { invertSymmetric } from '@/lib/math/linear'
import { longRunScale, type Scale } from './noise'
import { type Binned, fitPiecewise, type PiecewiseFit, type Prior, roughStart, startFrom } from './piecewise'

/** Relative gain in chi squared that is enough while breaks are looked for. */
const EXPLORING = 1e-3

export type Segmented = { fit: PiecewiseFit; scale: Scale }

const MAX_BREAKS = 3
/** Gain in chi squared (per unit variance) that one more break must bring: two unknowns at 2 ln n and a margin of six. */
const gainAsked = (n: number) => 2 * Math.log(Math.max(8, n)) + 6

/**
 * What a hinge at each bin would bring, to first order, as a signed number of standard deviations (its square is the fall of chi squared): the
 * hinge's score outside the span of the present model. Positive where the rate rises there.
 */
export function hingeScores(data: Binned, fit: PiecewiseFit, prior: Prior | null): Float64Array {
  const n = data.timeH.length
  const rates = fit.ratesPerHour.length
  const size = rates + 3
  const columns: Float64Array[] = Array.from({ length: size }, () => new Float64Array(n))
  const excess = new Float64Array(n)
  const edges = [fit.fromH, ...fit.breaksH, Number.POSITIVE_INFINITY]
  for (let i = 0; i < n; i++) {
    const w = 1 / data.sdPpm[i]!
    let exponent = fit.logStartExcess
    const durations: number[] = []
    for (let k = 0; k < rates; k++) {
      const d = Math.max(0, Math.min(data.timeH[i]!, edges[k + 1]!) - edges[k]!)
      durations.push(d)
      exponent -= fit.ratesPerHour[k]! * d
    }
    excess[i] = Math.exp(Math.min(12, exponent)) * w
    columns[0]![i] = excess[i]!
    for (let k = 0; k < rates; k++) columns[k + 1]![i] = -excess[i]! * durations[k]!
    columns[size - 2]![i] = w
    columns[size - 1]![i] = w * data.timeH[i]!
  }
  const normal = new Float64Array(size * size)
  for (let a = 0; a < size; a++)
    for (let b = 0; b < size; b++) {
      let sum = 0
      for (let i = 0; i < n; i++) sum += columns[a]![i]! * columns[b]![i]!
      normal[a * size + b] = sum
    }
  if (prior) normal[(size - 2) * size + size - 2]! += 1 / prior.sdPpm ** 2
  normal[size * size - 1]! += 1 / (prior?.driftSdPpmPerHour ?? 1e-5) ** 2
  const inverse = invertSymmetric(normal, size)
  const scores = new Float64Array(n)
  if (!inverse) return scores
  const cross = new Float64Array(size)
  for (let m = 2; m < n - 2; m++) {
    const at = data.timeH[m]!
    cross.fill(0)
    let own = 0
    let along = 0
    for (let i = m + 1; i < n; i++) {
      const hinge = -excess[i]! * (data.timeH[i]! - at)
      own += hinge * hinge
      along += hinge * fit.residuals[i]!
      for (let a = 0; a < size; a++) cross[a]! += hinge * columns[a]![i]!
    }
    for (let a = 0; a < size; a++)
      for (let b = 0; b < size; b++) own -= cross[a]! * inverse[a * size + b]! * cross[b]!
    scores[m] = own > 1e-9 ? along / Math.sqrt(own) : 0
  }
  return scores
}

function refit(
  data: Binned,
  breaksH: readonly number[],
  prior: Prior | null,
  like: PiecewiseFit,
  iterations = 12,
): PiecewiseFit | null {
  const sorted = [...breaksH].sort((a, b) => a - b)
  const rateAt = (t: number) => {
    let k = 0
    while (k < like.breaksH.length && t >= like.breaksH[k]!) k++
    return like.ratesPerHour[k]!
  }
  const edges = [like.fromH, ...sorted, data.timeH[data.timeH.length - 1]!]
  const rates = edges.slice(1).map((end, k) => rateAt((edges[k]! + end) / 2))
  const start = { ...startFrom(like), ratesPerHour: rates }
  return fitPiecewise(data, like.fromH, sorted, prior, start, iterations, EXPLORING)
}

function apart(breaksH: readonly number[], candidate: number, data: Binned, leastH: number): boolean {
  const edges = [data.timeH[0]!, ...breaksH, data.timeH[data.timeH.length - 1]!]
  return edges.every((edge) => Math.abs(edge - candidate) >= leastH)
}

/** Moves each break along the bins while chi squared falls. */
function slideBreaks(
  data: Binned,
  fit: PiecewiseFit,
  prior: Prior | null,
  leastH: number,
  firstStride = 3,
): PiecewiseFit {
  let best = fit
  let stride = firstStride
  for (let round = 0; round < 14; round++) {
    let moved = false
    for (let k = 0; k < best.breaksH.length; k++) {
      for (const direction of [-1, 1]) {
        const candidate = best.breaksH[k]! + direction * stride * spacingAt(data, best.breaksH[k]!)
        const others = best.breaksH.filter((_, i) => i !== k)
        if (!inside(data, candidate) || !apart(others, candidate, data, leastH)) continue
        const trial = refit(data, [...others, candidate], prior, best, 4)
        if (trial && trial.chiSquared < best.chiSquared - 1e-6) {
          best = trial
          moved = true
        }
      }
    }
    if (moved) continue
    // down to a third of a bin: a change seldom falls on the middle of one
    if (stride < 0.5) break
    stride /= 3
  }
  return best
}

const inside = (data: Binned, timeH: number) =>
  timeH > data.timeH[1]! && timeH < data.timeH[data.timeH.length - 2]!

/** Time between bins around an instant, hours. */
function spacingAt(data: Binned, timeH: number): number {
  const at = Math.min(data.timeH.length - 2, nearestBin(data, timeH))
  return data.timeH[at + 1]! - data.timeH[at]!
}

function nearestBin(data: Binned, timeH: number): number {
  let best = 0
  for (let i = 1; i < data.timeH.length; i++) {
    if (Math.abs(data.timeH[i]! - timeH) < Math.abs(data.timeH[best]! - timeH)) best = i
  }
  return best
}

function addBreak(data: Binned, fit: PiecewiseFit, prior: Prior | null, leastH: number): PiecewiseFit | null {
  const scores = hingeScores(data, fit, prior).map((score) => score * score)
  let best: PiecewiseFit | null = null
  const tried: number[] = []
  for (let attempt = 0; attempt < 2; attempt++) {
    let at = -1
    for (let m = 0; m < scores.length; m++) {
      if (!apart(fit.breaksH, data.timeH[m]!, data, leastH)) continue
      if (tried.some((seen) => Math.abs(data.timeH[seen]! - data.timeH[m]!) < 4 * leastH)) continue
      if (at < 0 || scores[m]! > scores[at]!) at = m
    }
    if (at < 0 || scores[at]! < 3) break
    tried.push(at)
    const trial = refit(data, [...fit.breaksH, data.timeH[at]!], prior, fit)
    if (trial && (!best || trial.chiSquared < best.chiSquared)) best = trial
  }
  return best ? slideBreaks(data, best, prior, leastH) : null
}

/** Changes of less than this ratio are more often wind or the background than a fan: they must be that many times surer. */
const SLIGHT_RATIO = 1.35
const SLIGHT_FACTOR = 3

function slightChange({ ratesPerHour }: PiecewiseFit): boolean {
  return ratesPerHour.some((rate, k) => {
    const before = ratesPerHour[k - 1]
    if (before === undefined || rate <= 0 || before <= 0) return false
    return Math.max(rate, before) < SLIGHT_RATIO * Math.min(rate, before)
  })
}

/** Breaks are looked for in pairs of bins when there are many. */
const COARSE_BINS = 90

/** Neighbouring bins joined in pairs: deviations are on the long-run scale, so two count as two. */
function paired(data: Binned): Binned {
  const n = data.timeH.length >> 1
  const half = (values: Float64Array) =>
    Float64Array.from({ length: n }, (_, i) => (values[2 * i]! + values[2 * i + 1]!) / 2)
  return {
    timeH: half(data.timeH),
    ppm: half(data.ppm),
    sdPpm: half(data.sdPpm).map((sd) => sd / Math.SQRT2),
  }
}

function onFineBins(fine: Binned, coarse: PiecewiseFit, prior: Prior, leastH: number): Segmented | null {
  const start = startFrom(coarse)
  const fit = fitPiecewise(fine, fine.timeH[0]!, coarse.breaksH, prior, start)
  if (!fit) return null
  const best = fit.breaksH.length > 0 ? slideBreaks(fine, fit, prior, leastH, 1) : fit
  return { fit: best, scale: longRunScale(best, fine) }
}

/** Splits a fall at the instants where its rate changes. Null when not even one rate can be fitted. */
export function segmentFall(
  fine: Binned,
  prior: Prior,
  leastH: number,
  maxBreaks = MAX_BREAKS,
): Segmented | null {
  if (fine.timeH.length < 4) return null
  const data = fine.timeH.length > (2 * COARSE_BINS) / 1.5 ? paired(fine) : fine
  const first = fitPiecewise(data, data.timeH[0]!, [], prior, roughStart(data, prior.ppm))
  if (!first) return null
  const ladder = [first]
  while (ladder.length <= maxBreaks && data.timeH.length >= 4 * ladder.length + 4) {
    const last = ladder[ladder.length - 1]!
    const next = addBreak(data, last, prior, leastH)
    if (!next || last.chiSquared - next.chiSquared < 8) break
    ladder.push(next)
  }
  const scale = longRunScale(ladder[ladder.length - 1]!, data)
  const asked = gainAsked(data.timeH.length) * Math.max(0.6, scale.variance)
  let fit = ladder[ladder.length - 1]!
  while (fit.breaksH.length > 0) {
    let cheapest: PiecewiseFit | null = null
    for (let k = 0; k < fit.breaksH.length; k++) {
      const fewer = refit(
        data,
        fit.breaksH.filter((_, i) => i !== k),
        prior,
        fit,
      )
      if (!fewer) continue
      if (!cheapest || fewer.chiSquared < cheapest.chiSquared) cheapest = fewer
    }
    if (!cheapest) break
    const slid = slideBreaks(data, cheapest, prior, leastH)
    const lost = slid.chiSquared - fit.chiSquared
    if (lost > asked * (slightChange(fit) ? SLIGHT_FACTOR : 1)) break
    fit = slid
  }
  return onFineBins(fine, fit, prior, leastH)
}

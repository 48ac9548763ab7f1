import { noiseOf } from './curve'
import type { Sample } from './types'

/** Final level of a step-up with its standard uncertainty, and how much of it the record reached. */
export type Steady = { level: number; standardUncertainty: number; reachedShare: number }

type Fit = { sse: number; level: number; amplitude: number; levelVariance: number }

/** Level and amplitude of C = level − amplitude e^(−λ (t − t0)) by linear least squares at one λ. */
function fitAtRate(samples: readonly Sample[], originS: number, ratePerS: number): Fit | null {
  let [n, se, see, sy, sey] = [0, 0, 0, 0, 0]
  for (const [timeS, value] of samples) {
    const e = Math.exp(-ratePerS * (timeS - originS))
    n++
    se += e
    see += e * e
    sy += value
    sey += e * value
  }
  const det = n * see - se * se
  if (!(det > 1e-9 * n * n)) return null
  const level = (see * sy - se * sey) / det
  const amplitude = -(n * sey - se * sy) / det
  let sse = 0
  for (const [timeS, value] of samples) {
    sse += (value - level + amplitude * Math.exp(-ratePerS * (timeS - originS))) ** 2
  }
  return { sse, level, amplitude, levelVariance: see / det }
}

/**
 * Final level of a step-up from the last part of the record: C∞ − B e^(−λt), λ by a scan and then a golden-section search.
 * @param samples tidy record
 * @returns null when the record has fewer than eight samples after the step
 */
export function fitSteady(samples: readonly Sample[]): Steady | null {
  const after = samples.filter(([timeS]) => timeS > 0)
  if (after.length < 8) return null
  const endS = after.at(-1)![0]
  const late = after.filter(([timeS]) => timeS >= 0.35 * endS)
  const used = late.length >= 8 ? late : after.slice(-8)
  const originS = used[0]![0]
  const spanS = Math.max(endS - originS, 1e-9)
  const noise = noiseOf(after.map(([, value]) => value))
  const mean = used.reduce((sum, [, value]) => sum + value, 0) / used.length
  const spread = Math.max(...used.map(([, value]) => value)) - Math.min(...used.map(([, value]) => value))
  // flat to within noise: already there
  if (spread <= Math.max(6 * noise, 1e-9 * Math.abs(mean))) {
    return { level: mean, standardUncertainty: noise / Math.sqrt(used.length), reachedShare: 1 }
  }
  const sse = (logRate: number) =>
    fitAtRate(used, originS, Math.exp(logRate))?.sse ?? Number.POSITIVE_INFINITY
  const lowest = Math.log(0.3 / spanS)
  const highest = Math.log(40 / spanS)
  const steps = 40
  const width = (highest - lowest) / steps
  let best = lowest
  for (let i = 0; i <= steps; i++) if (sse(lowest + i * width) < sse(best)) best = lowest + i * width
  let [low, high] = [best - width, best + width]
  for (let i = 0; i < 40; i++) {
    const a = high - 0.6180339887 * (high - low)
    const b = low + 0.6180339887 * (high - low)
    if (sse(a) < sse(b)) high = b
    else low = a
  }
  const fit = fitAtRate(used, originS, Math.exp((low + high) / 2))
  if (!fit) return null
  const last = used.at(-1)![1]
  const beyond = Math.abs(fit.level - last)
  // λ is fitted too: the part of the level that is extrapolated is doubted by a quarter
  const standardUncertainty = Math.hypot(noise * Math.sqrt(fit.levelVariance), beyond / 4)
  return {
    level: fit.level,
    standardUncertainty,
    reachedShare: 1 - beyond / Math.max(Math.abs(fit.level), 1e-300),
  }
}

import { invertSymmetric } from '@/lib/math/linear'
import { median } from '@/lib/math/robust'
import type { Sample } from './types'

/** Share of the old air still there: F(t) from 1 at the step to 0, at times after it (first entry at t = 0). */
export type Curve = {
  timeS: number[]
  share: number[]
  /** white noise of one sample, as a share */
  noise: number
  /** start value was found below (or above) 1 by extrapolation: a short circuit in the exhaust */
  jumps: boolean
}

/** Samples in order of time, several at one time averaged. */
export function tidy(samples: readonly Sample[]): Sample[] {
  const sums = new Map<number, { sum: number; count: number }>()
  for (const [timeS, value] of samples) {
    const at = sums.get(timeS)
    if (at) {
      at.sum += value
      at.count++
    } else sums.set(timeS, { sum: value, count: 1 })
  }
  return [...sums].sort(([a], [b]) => a - b).map(([timeS, { sum, count }]) => [timeS, sum / count] as const)
}

/** White-noise sd from third differences (variance 20 σ²), which a smooth curve hardly feels; robust against single jumps. */
export function noiseOf(values: readonly number[]): number {
  if (values.length < 7) return 0
  const thirds: number[] = []
  for (let i = 0; i + 3 < values.length; i++) {
    thirds.push(Math.abs(values[i]! - 3 * values[i + 1]! + 3 * values[i + 2]! - values[i + 3]!))
  }
  return (1.4826 * median(thirds)) / Math.sqrt(20)
}

/** Least-squares polynomial through (x, y): value at x = 0, and its standard error per unit of y noise. */
function extrapolateToZero(
  x: readonly number[],
  y: readonly number[],
  degree: 1 | 2,
): { value: number; gain: number } {
  const scale = x.at(-1)!
  const size = degree + 1
  const normal = new Float64Array(size * size)
  const right = new Float64Array(size)
  x.forEach((xi, i) => {
    for (let r = 0; r < size; r++) {
      right[r]! += (xi / scale) ** r * y[i]!
      for (let c = 0; c < size; c++) normal[r * size + c]! += (xi / scale) ** (r + c)
    }
  })
  const inverse = invertSymmetric(normal, size)
  if (!inverse) return { value: 0, gain: 0 }
  let value = 0
  for (let c = 0; c < size; c++) value += inverse[c]! * right[c]!
  return { value, gain: Math.sqrt(inverse[0]!) }
}

const LEAST_JUMP = 0.03
const JUMP_SIGMAS = 4

/**
 * Value of F just after the step, from the first samples by a straight line and a parabola in ln F. A jump is believed only when both
 * say so by more than noise: a line alone is fooled by convex starts, a parabola by noise.
 * @returns 1 unless a jump is proven
 */
export function startShare(timeS: readonly number[], share: readonly number[], noise: number): number {
  const early = share.slice(0, 6)
  if (early.length < 4 || early.some((value) => value < Math.max(0.2, 5 * noise))) return 1
  const x = timeS.slice(0, early.length)
  const y = early.map(Math.log)
  const line = extrapolateToZero(x.slice(0, 4), y.slice(0, 4), 1)
  const parabola = extrapolateToZero(x, y, 2)
  const nearest = Math.abs(line.value) < Math.abs(parabola.value) ? line : parabola
  const sameSide = line.value * parabola.value > 0
  const typical = early.reduce((sum, value) => sum + value, 0) / early.length
  const sure = Math.abs(nearest.value) > Math.max(LEAST_JUMP, (JUMP_SIGMAS * nearest.gain * noise) / typical)
  return sameSide && sure ? Math.exp(nearest.value) : 1
}

/**
 * F(t) after the step of a normalised record. The value at t = 0 is 1 unless a jump is proven, whatever a sample at t = 0 says.
 * @param shares samples as (seconds, share), tidy
 */
export function curveOf(shares: readonly Sample[]): Curve {
  const after = shares.filter(([timeS]) => timeS > 0)
  const timeS = after.map(([t]) => t)
  const share = after.map(([, value]) => value)
  const noise = noiseOf(share)
  const start = startShare(timeS, share, noise)
  return { timeS: [0, ...timeS], share: [start, ...share], noise, jumps: start !== 1 }
}

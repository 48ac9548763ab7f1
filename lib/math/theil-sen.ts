import { medianSorted } from 'simple-statistics'
import { NORMAL_975, normalTwoSidedP } from './normal'

/** Mann–Kendall test of a monotone trend. */
export type MannKendall = { s: number; variance: number; z: number; p: number }

/**
 * Mann–Kendall statistic with the variance corrected for ties. `varianceInflation` (≥ 1) widens it for correlated values, e.g.
 * (1 + φ) / (1 − φ). Source: Mann 1945, Kendall 1975 (from memory).
 */
export function mannKendall(values: readonly number[], varianceInflation = 1): MannKendall {
  const n = values.length
  let s = 0
  for (let i = 0; i < n; i++) for (let j = i + 1; j < n; j++) s += Math.sign(values[j]! - values[i]!)
  const counts = new Map<number, number>()
  for (const value of values) counts.set(value, (counts.get(value) ?? 0) + 1)
  let variance = n * (n - 1) * (2 * n + 5)
  for (const t of counts.values()) variance -= t * (t - 1) * (2 * t + 5)
  variance = (variance / 18) * varianceInflation
  const z = s === 0 || variance <= 0 ? 0 : (s - Math.sign(s)) / Math.sqrt(variance)
  return { s, variance, z, p: normalTwoSidedP(z) }
}

/** Slope with its 95 % interval, per unit of x. */
export type TheilSen = { slope: number; low: number; high: number; intercept: number }

/**
 * Theil–Sen line: median of the pairwise slopes, interval after Sen 1968 from the Mann–Kendall variance (from memory).
 * @throws RangeError with fewer than two distinct x
 */
export function theilSen(x: readonly number[], y: readonly number[], varianceInflation = 1): TheilSen {
  const slopes: number[] = []
  for (let i = 0; i < x.length; i++) {
    for (let j = i + 1; j < x.length; j++) {
      if (x[j] !== x[i]) slopes.push((y[j]! - y[i]!) / (x[j]! - x[i]!))
    }
  }
  if (slopes.length === 0) throw new RangeError('Theil–Sen needs two points with different x')
  slopes.sort((a, b) => a - b)
  const slope = medianSorted(slopes)
  const reach = NORMAL_975 * Math.sqrt(mannKendall(y, varianceInflation).variance)
  const lowIndex = Math.max(0, Math.floor((slopes.length - reach) / 2))
  const highIndex = Math.min(slopes.length - 1, Math.ceil((slopes.length + reach) / 2))
  const residuals = y.map((value, i) => value - slope * x[i]!).sort((a, b) => a - b)
  return { slope, low: slopes[lowIndex]!, high: slopes[highIndex]!, intercept: medianSorted(residuals) }
}

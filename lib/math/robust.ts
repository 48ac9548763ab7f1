/** Order statistics that a few wild readings cannot move. */

/** Median of a list; NaN for an empty one. Does not change its argument. */
export function median(values: ArrayLike<number>): number {
  return quantile(values, 0.5)
}

/** Quantile by linear interpolation between order statistics (Hyndman and Fan 1996, type 7); NaN for an empty list. */
export function quantile(values: ArrayLike<number>, probability: number): number {
  const sorted = Float64Array.from(values).sort()
  return quantileSorted(sorted, probability)
}

/** As `quantile`, for values that are sorted already. */
export function quantileSorted(sorted: ArrayLike<number>, probability: number): number {
  const n = sorted.length
  if (n === 0) return Number.NaN
  const at = probability * (n - 1)
  const low = Math.floor(at)
  const high = Math.min(n - 1, low + 1)
  return sorted[low]! + (at - low) * (sorted[high]! - sorted[low]!)
}

/** Standard deviation from the median absolute deviation (factor 1.4826 for a normal distribution). */
export function madStandardDeviation(values: ArrayLike<number>): number {
  const centre = median(values)
  return 1.4826 * median(Float64Array.from(values, (value) => Math.abs(value - centre)))
}

/** Arithmetic mean; NaN for an empty list. */
export function mean(values: ArrayLike<number>): number {
  let sum = 0
  for (let i = 0; i < values.length; i++) sum += values[i]!
  return sum / values.length
}

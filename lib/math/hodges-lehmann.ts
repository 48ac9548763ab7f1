import { medianSorted } from 'simple-statistics'

/**
 * Counts of the Wilcoxon signed-rank statistic: element w is the number of sign patterns of n ranks with sum w (exact to n = 50, where
 * the counts still fit a double).
 */
function signedRankCounts(n: number): Float64Array {
  const counts = new Float64Array((n * (n + 1)) / 2 + 1)
  counts[0] = 1
  for (let rank = 1; rank <= n; rank++) {
    for (let w = counts.length - 1; w >= rank; w--) counts[w] = counts[w]! + counts[w - rank]!
  }
  return counts
}

/**
 * How many Walsh averages the exact interval drops at each end, plus one: the interval runs from the k-th smallest to the k-th largest.
 * @returns 0 when no interval with this confidence exists (n below 6 at 95 %)
 */
export function signedRankCriticalIndex(n: number, confidence = 0.95): number {
  const tail = (1 - confidence) / 2
  if (n > 50) {
    const mean = (n * (n + 1)) / 4
    const sd = Math.sqrt((n * (n + 1) * (2 * n + 1)) / 24)
    return Math.max(0, Math.floor(mean + 0.5 - 1.959963984540054 * sd))
  }
  const counts = signedRankCounts(n)
  const patterns = 2 ** n
  let cumulative = 0
  let index = 0
  while (index < counts.length && (cumulative + counts[index]!) / patterns <= tail) {
    cumulative += counts[index]!
    index++
  }
  return index
}

/** Sorted Walsh averages (x_i + x_j) / 2 for i ≤ j. Infinite values are allowed and stay infinite. */
export function walshAverages(values: readonly number[]): Float64Array {
  const averages = new Float64Array((values.length * (values.length + 1)) / 2)
  let k = 0
  for (let i = 0; i < values.length; i++) {
    for (let j = i; j < values.length; j++) averages[k++] = (values[i]! + values[j]!) / 2
  }
  return averages.sort()
}

/**
 * Hodges–Lehmann location (median of the Walsh averages) with the exact distribution-free interval of the signed-rank test. A fifth of
 * the values may be wild without moving it far. Source: Hodges & Lehmann 1963; interval after Hollander & Wolfe (from memory).
 * @returns null limits where the sample is too small for the confidence (n < 6 at 95 %)
 * @throws RangeError on an empty sample
 */
export function hodgesLehmann(
  values: readonly number[],
  confidence = 0.95,
): { location: number; low: number | null; high: number | null } {
  if (values.length === 0) throw new RangeError('Hodges–Lehmann needs at least one value')
  const averages = walshAverages(values)
  const location = medianSorted(averages as unknown as number[])
  const k = signedRankCriticalIndex(values.length, confidence)
  if (k < 1) return { location, low: null, high: null }
  return { location, low: averages[k - 1]!, high: averages[averages.length - k]! }
}

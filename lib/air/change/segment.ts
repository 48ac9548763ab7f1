/**
 * Penalised segmentation into stretches of constant mean by dynamic programming: minimises Σ SSE / variance + penalty per change, each
 * stretch at least `leastLength` long. Exact (optimal partitioning), n² steps.
 * @returns index of the first value of every stretch but the first
 * @source Jackson et al. 2005 / Killick, Fearnhead & Eckley 2012 (from memory)
 */
export function segment(
  values: readonly number[],
  variance: number,
  penalty: number,
  leastLength: number,
): number[] {
  const n = values.length
  const sums = new Float64Array(n + 1)
  const squares = new Float64Array(n + 1)
  values.forEach((value, i) => {
    sums[i + 1] = sums[i]! + value
    squares[i + 1] = squares[i]! + value * value
  })
  const cost = (from: number, to: number) => {
    const sum = sums[to]! - sums[from]!
    return (squares[to]! - squares[from]! - (sum * sum) / (to - from)) / variance
  }
  const best = new Float64Array(n + 1).fill(Number.POSITIVE_INFINITY)
  const previous = new Int32Array(n + 1)
  best[0] = -penalty
  for (let end = leastLength; end <= n; end++) {
    for (let start = 0; start <= end - leastLength; start++) {
      const total = best[start]! + cost(start, end) + penalty
      if (total < best[end]!) {
        best[end] = total
        previous[end] = start
      }
    }
  }
  const changes: number[] = []
  for (let at = previous[n] ?? 0; at > 0; at = previous[at]!) changes.unshift(at)
  return changes
}

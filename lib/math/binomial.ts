/**
 * P(X ≥ k) of a binomial variable: at least k successes in n trials of probability p. Summed directly, for n up to a few hundred.
 * @throws RangeError when p is outside [0, 1]
 */
export function binomialUpperTail(k: number, n: number, p: number): number {
  if (!(p >= 0 && p <= 1)) throw new RangeError(`binomial needs 0 ≤ p ≤ 1, got ${p}`)
  if (k <= 0) return 1
  if (p === 0 || k > n) return 0
  if (p === 1) return 1
  let lnTerm = n * Math.log1p(-p)
  let tail = 0
  for (let i = 0; i <= n; i++) {
    if (i >= k) tail += Math.exp(lnTerm)
    lnTerm += Math.log((n - i) / (i + 1)) + Math.log(p / (1 - p))
  }
  return Math.min(1, tail)
}

/** Complementary error function for x ≥ 0: power series near zero, continued fraction beyond (Abramowitz & Stegun 7.1.5, 7.1.14). */
function erfcPositive(x: number): number {
  if (x < 2.5) {
    let term = x
    let sum = x
    for (let n = 1; n < 200 && Math.abs(term) > 1e-17 * sum; n++) {
      term *= (-x * x) / n
      sum += term / (2 * n + 1)
    }
    return 1 - (2 / Math.sqrt(Math.PI)) * sum
  }
  let fraction = 0
  for (let k = 120; k >= 1; k--) fraction = k / 2 / (x + fraction)
  return Math.exp(-x * x) / Math.sqrt(Math.PI) / (x + fraction)
}

/** Standard normal distribution function, absolute error below 1e-14. */
export function normalCdf(z: number): number {
  const half = 0.5 * erfcPositive(Math.abs(z) / Math.SQRT2)
  return z > 0 ? 1 - half : half
}

/** Two-sided p-value of a standard normal statistic. */
export function normalTwoSidedP(z: number): number {
  return Math.min(1, erfcPositive(Math.abs(z) / Math.SQRT2))
}

/**
 * Standard normal quantile: bisection-guarded Newton on `normalCdf`.
 * @throws RangeError when p is outside (0, 1)
 */
export function normalQuantile(p: number): number {
  if (!(p > 0 && p < 1)) throw new RangeError(`normal quantile needs 0 < p < 1, got ${p}`)
  let low = -40
  let high = 40
  let z = 0
  for (let step = 0; step < 200; step++) {
    const excess = normalCdf(z) - p
    if (excess > 0) high = z
    else low = z
    const newton = z - (excess * Math.sqrt(2 * Math.PI)) / Math.exp(-0.5 * z * z)
    const next = newton > low && newton < high ? newton : (low + high) / 2
    if (Math.abs(next - z) <= 1e-15 * Math.max(1, Math.abs(next))) break
    z = next
  }
  return z
}

/** 97.5 % point of the standard normal: half-width of a 95 % interval in standard uncertainties. */
export const NORMAL_975 = 1.959963984540054

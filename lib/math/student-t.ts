/** Student's t distribution. */

const LANCZOS = [
  0.99999999999980993, 676.5203681218851, -1259.1392167224028, 771.32342877765313, -176.61502916214059,
  12.507343278686905, -0.13857109526572012, 9.9843695780195716e-6, 1.5056327351493116e-7,
]

/** Natural logarithm of the gamma function for x > 0 (Lanczos approximation, g = 7, n = 9; relative error below 1e-13). */
export function logGamma(x: number): number {
  if (x < 0.5) return Math.log(Math.PI / Math.sin(Math.PI * x)) - logGamma(1 - x)
  const z = x - 1
  let sum = LANCZOS[0]!
  for (let i = 1; i < LANCZOS.length; i++) sum += LANCZOS[i]! / (z + i)
  const t = z + 7.5
  return 0.5 * Math.log(2 * Math.PI) + (z + 0.5) * Math.log(t) - t + Math.log(sum)
}

/** Continued fraction of the incomplete beta function (modified Lentz; Numerical Recipes 6.4). */
function betaFraction(x: number, a: number, b: number): number {
  const tiny = 1e-300
  let c = 1
  let d = 1 - ((a + b) * x) / (a + 1)
  d = 1 / (Math.abs(d) < tiny ? tiny : d)
  let value = d
  for (let m = 1; m <= 300; m++) {
    const even = (m * (b - m) * x) / ((a + 2 * m - 1) * (a + 2 * m))
    const odd = (-(a + m) * (a + b + m) * x) / ((a + 2 * m) * (a + 2 * m + 1))
    let step = 1
    for (const term of [even, odd]) {
      d = 1 + term * d
      d = 1 / (Math.abs(d) < tiny ? tiny : d)
      c = 1 + term / c
      if (Math.abs(c) < tiny) c = tiny
      step = c * d
      value *= step
    }
    if (Math.abs(step - 1) < 1e-15) break
  }
  return value
}

/** Regularised incomplete beta function I_x(a, b), 0 <= x <= 1. */
export function incompleteBeta(x: number, a: number, b: number): number {
  if (x <= 0) return 0
  if (x >= 1) return 1
  const front = Math.exp(logGamma(a + b) - logGamma(a) - logGamma(b) + a * Math.log(x) + b * Math.log1p(-x))
  if (x < (a + 1) / (a + b + 2)) return (front * betaFraction(x, a, b)) / a
  return 1 - (front * betaFraction(1 - x, b, a)) / b
}

/** Probability that a t variable with `degreesOfFreedom` is at most `t`. */
export function studentTCdf(t: number, degreesOfFreedom: number): number {
  const tail = 0.5 * incompleteBeta(degreesOfFreedom / (degreesOfFreedom + t * t), degreesOfFreedom / 2, 0.5)
  return t >= 0 ? 1 - tail : tail
}

const quantileCache = new Map<number, number>()

/** Quantile of Student's t by bisection, to about 1e-10; degrees of freedom may be fractional but must be positive. */
export function studentTQuantile(probability: number, degreesOfFreedom: number): number {
  if (!(degreesOfFreedom > 0)) throw new RangeError('degrees of freedom must be positive')
  if (probability < 0.5) return -studentTQuantile(1 - probability, degreesOfFreedom)
  let low = 0
  let high = 2
  while (studentTCdf(high, degreesOfFreedom) < probability && high < 1e8) high *= 2
  for (let i = 0; i < 100 && high - low > 1e-11 * (1 + high); i++) {
    const middle = (low + high) / 2
    if (studentTCdf(middle, degreesOfFreedom) < probability) low = middle
    else high = middle
  }
  return (low + high) / 2
}

/** The two-sided 95 % factor of Student's t; degrees of freedom are rounded to a tenth so that it can be remembered. */
export function t95(degreesOfFreedom: number): number {
  const key = Math.max(1, Math.min(1000, Math.round(degreesOfFreedom * 10) / 10))
  const known = quantileCache.get(key)
  if (known !== undefined) return known
  const value = studentTQuantile(0.975, key)
  quantileCache.set(key, value)
  return value
}

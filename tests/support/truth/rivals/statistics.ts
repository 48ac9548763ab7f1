/**
 * Quantile of Student's t by the expansion of Cornish and Fisher (Abramowitz & Stegun 26.7.5); better than 0.1 % for ≥ 4 degrees
 * of freedom at 97.5 %, which is all that a rival needs.
 */
export function studentQuantile975(degrees: number): number {
  const z = 1.959963985
  const n = Math.max(3, degrees)
  const g1 = (z ** 3 + z) / 4
  const g2 = (5 * z ** 5 + 16 * z ** 3 + 3 * z) / 96
  const g3 = (3 * z ** 7 + 19 * z ** 5 + 17 * z ** 3 - 15 * z) / 384
  const g4 = (79 * z ** 9 + 776 * z ** 7 + 1482 * z ** 5 - 1920 * z ** 3 - 945 * z) / 92160
  return z + g1 / n + g2 / n ** 2 + g3 / n ** 3 + g4 / n ** 4
}

/** Running median over `2 half + 1` values. */
export function runningMedian(values: readonly number[], half: number): number[] {
  return values.map((_, i) => {
    const window = values.slice(Math.max(0, i - half), i + half + 1).sort((a, b) => a - b)
    return window[Math.floor(window.length / 2)]!
  })
}

/** Lag-one correlation of residuals, corrected for the fitted line (2 + 4φ)/n, kept within 0 and 0.95. */
export function lagOne(residuals: readonly number[]): number {
  let top = 0
  let bottom = 0
  for (let i = 0; i < residuals.length; i++) {
    bottom += residuals[i]! ** 2
    if (i > 0) top += residuals[i]! * residuals[i - 1]!
  }
  const phi = bottom > 0 ? top / bottom : 0
  return Math.min(0.95, Math.max(0, phi + (2 + 4 * phi) / residuals.length))
}

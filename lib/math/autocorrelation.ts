/** What correlated residuals are worth. */

/** Lag-one correlation of residuals (about zero); 0 when there are fewer than four. */
export function lagOneCorrelation(residuals: ArrayLike<number>): number {
  let across = 0
  let own = 0
  for (let i = 0; i < residuals.length; i++) {
    own += residuals[i]! * residuals[i]!
    if (i > 0) across += residuals[i]! * residuals[i - 1]!
  }
  return residuals.length < 4 || own === 0 ? 0 : across / own
}

/** The estimate of `lagOneCorrelation` is too low after a fitted line; this corrects it (Marriott and Pope 1954), kept in 0..0.95. */
export function biasCorrectedCorrelation(phi: number, n: number): number {
  return Math.min(0.95, Math.max(0, phi + (2 + 4 * phi) / n))
}

/** The number of independent readings that n readings with lag-one correlation phi are worth (Santer et al. 2000). */
export function effectiveSampleSize(n: number, phi: number): number {
  return (n * (1 - phi)) / (1 + phi)
}

/**
 * Exact factor by which the standard error of a straight line's slope grows when residuals follow AR(1) with phi,
 * n equally spaced points. Tends to sqrt((1 + phi) / (1 - phi)) for long records.
 */
export function slopeErrorInflation(n: number, phi: number): number {
  const centre = (n - 1) / 2
  let plain = 0
  let correlated = 0
  for (let lag = 0; lag < n; lag++) {
    let product = 0
    for (let i = 0; i + lag < n; i++) product += (i - centre) * (i + lag - centre)
    if (lag === 0) plain = product
    correlated += (lag === 0 ? 1 : 2 * phi ** lag) * product
  }
  return Math.sqrt(correlated / plain)
}

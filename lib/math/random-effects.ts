/**
 * Random-effects location (DerSimonian & Laird 1986): values with own standard errors and a common between-value variance τ².
 * Inverse-variance weights alone are never used: the value with the smallest formal error would win.
 * @throws RangeError on unequal lengths, an empty sample or a standard error that is not positive
 */
export function randomEffects(
  values: readonly number[],
  standardErrors: readonly number[],
): { location: number; standardError: number; betweenVariance: number; inverseVarianceLocation: number } {
  if (values.length === 0 || values.length !== standardErrors.length) {
    throw new RangeError('random effects needs as many standard errors as values, and at least one')
  }
  if (standardErrors.some((u) => !(u > 0))) throw new RangeError('random effects needs standard errors > 0')
  const weighted = (weights: readonly number[]) => {
    const total = weights.reduce((sum, w) => sum + w, 0)
    return { total, mean: values.reduce((sum, y, i) => sum + weights[i]! * y, 0) / total }
  }
  const fixedWeights = standardErrors.map((u) => 1 / (u * u))
  const fixed = weighted(fixedWeights)
  const q = values.reduce((sum, y, i) => sum + fixedWeights[i]! * (y - fixed.mean) ** 2, 0)
  const squares = fixedWeights.reduce((sum, w) => sum + w * w, 0)
  const scale = fixed.total - squares / fixed.total
  const betweenVariance = scale > 0 ? Math.max(0, (q - (values.length - 1)) / scale) : 0
  const random = weighted(standardErrors.map((u) => 1 / (u * u + betweenVariance)))
  return {
    location: random.mean,
    standardError: Math.sqrt(1 / random.total),
    betweenVariance,
    inverseVarianceLocation: fixed.mean,
  }
}

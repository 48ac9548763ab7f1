import { biasCorrectedCorrelation, effectiveSampleSize, lagOneCorrelation } from './autocorrelation'
import { invertSymmetric } from './linear'
import { studentTQuantile } from './student-t'

/** Model that is linear in everything but one positive parameter: value_i = offset_i + Σ coefficient_j basis_j[i]. */
export type ProfileModel = (parameter: number) => {
  basis: readonly (readonly number[])[]
  offset?: readonly number[]
}

export type ProfileFit = {
  parameter: number
  /** 95 % limits from the standard error of ln(parameter) and Student t with the effective number of readings */
  low: number
  high: number
  lnStandardError: number
  coefficients: number[]
  coefficientStandardErrors: number[]
  residualSd: number
  /** lag-one correlation of the residuals (bias-corrected) and the independent readings they are worth */
  lagOneCorrelation: number
  effectiveReadings: number
}

type Linear = { coefficients: number[]; residuals: Float64Array; sse: number }

/** Least-squares coefficients of the basis; null when its columns are not independent. */
function solveLinear(values: readonly number[], model: ReturnType<ProfileModel>): Linear | null {
  const { basis, offset } = model
  const p = basis.length
  const normal = new Float64Array(p * p)
  const right = new Float64Array(p)
  const y = values.map((value, i) => value - (offset?.[i] ?? 0))
  for (let a = 0; a < p; a++) {
    for (let i = 0; i < y.length; i++) right[a]! += basis[a]![i]! * y[i]!
    for (let b = 0; b < p; b++)
      for (let i = 0; i < y.length; i++) normal[a * p + b]! += basis[a]![i]! * basis[b]![i]!
  }
  const inverse = invertSymmetric(normal, p)
  if (!inverse) return null
  const coefficients = basis.map((_, a) =>
    right.reduce((sum, value, b) => sum + inverse[a * p + b]! * value, 0),
  )
  const residuals = Float64Array.from(y, (value, i) =>
    basis.reduce((rest, column, a) => rest - coefficients[a]! * column[i]!, value),
  )
  return { coefficients, residuals, sse: residuals.reduce((sum, r) => sum + r * r, 0) }
}

/** Inverse normal matrix of the whole model (basis and the parameter's own direction), the parameter last. */
function covarianceShape(
  model: ProfileModel,
  parameter: number,
  coefficients: readonly number[],
): Float64Array | null {
  const step = 1e-4
  const value = (at: number) => {
    const { basis, offset } = model(at)
    return basis[0]!.map((_, i) =>
      basis.reduce((sum, column, a) => sum + coefficients[a]! * column[i]!, offset?.[i] ?? 0),
    )
  }
  const up = value(parameter * (1 + step))
  const down = value(parameter * (1 - step))
  const columns = [...model(parameter).basis, up.map((one, i) => (one - down[i]!) / (2 * step))]
  const p = columns.length
  const normal = new Float64Array(p * p)
  for (let a = 0; a < p; a++) {
    for (let b = 0; b < p; b++) {
      for (let i = 0; i < columns[a]!.length; i++) normal[a * p + b]! += columns[a]![i]! * columns[b]![i]!
    }
  }
  return invertSymmetric(normal, p)
}

/** Smallest sum of squares over ln(parameter): a scan, then golden section. */
function searchParameter(sse: (ln: number) => number, low: number, high: number): number {
  const steps = 40
  const width = (high - low) / steps
  let best = low
  for (let i = 1; i <= steps; i++) if (sse(low + i * width) < sse(best)) best = low + i * width
  let [from, to] = [Math.max(low, best - width), Math.min(high, best + width)]
  for (let i = 0; i < 45; i++) {
    const a = to - 0.6180339887 * (to - from)
    const b = from + 0.6180339887 * (to - from)
    if (sse(a) < sse(b)) to = b
    else from = a
  }
  return (from + to) / 2
}

/**
 * Least squares by profiling: the linear coefficients are solved for at every value of the one non-linear parameter. Standard errors from
 * the full Jacobian, widened for AR(1) residuals by the effective number of readings.
 * @returns null when the columns are dependent, or too few independent readings are left to say anything
 * @source variable projection after Golub & Pereyra 1973; effective sample after Santer et al. 2000 (both from memory)
 */
export function profileFit(
  values: readonly number[],
  model: ProfileModel,
  range: { low: number; high: number },
): ProfileFit | null {
  const sse = (ln: number) => solveLinear(values, model(Math.exp(ln)))?.sse ?? Number.POSITIVE_INFINITY
  const parameter = Math.exp(searchParameter(sse, Math.log(range.low), Math.log(range.high)))
  const linear = solveLinear(values, model(parameter))
  if (!linear) return null
  const shape = covarianceShape(model, parameter, linear.coefficients)
  if (!shape) return null
  const p = linear.coefficients.length + 1
  const n = values.length
  const phi = biasCorrectedCorrelation(lagOneCorrelation(linear.residuals), n)
  const effective = effectiveSampleSize(n, phi)
  if (effective <= p + 1) return null
  const residualVariance = linear.sse / (effective - p)
  const errorOf = (k: number) => Math.sqrt(residualVariance * shape[k * p + k]!)
  const lnStandardError = errorOf(p - 1)
  const reach = Math.exp(studentTQuantile(0.975, effective - p) * lnStandardError)
  return {
    parameter,
    low: parameter / reach,
    high: parameter * reach,
    lnStandardError,
    coefficients: linear.coefficients,
    coefficientStandardErrors: linear.coefficients.map((_, k) => errorOf(k)),
    residualSd: Math.sqrt(linear.sse / Math.max(1, n - p)),
    lagOneCorrelation: phi,
    effectiveReadings: effective,
  }
}

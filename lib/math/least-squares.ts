/** A small general solver for nonlinear least squares, for models that have no solver of their own. */
import { invertSymmetric } from './linear'

export type LeastSquaresProblem = {
  /** number of residuals */
  count: number
  start: ArrayLike<number>
  /** writes the weighted residuals (reading - model) / sd at the parameters; a prior is one more residual */
  residuals: (parameters: Float64Array, out: Float64Array) => void
  iterations?: number
}

export type LeastSquaresSolution = {
  parameters: Float64Array
  chiSquared: number
  /** for unit weight, row by row */
  covariance: Float64Array
  residuals: Float64Array
  iterations: number
}

/** Central differences of the residuals; the step is a cube root of the machine's resolution times the parameter's size. */
function differentiate(problem: LeastSquaresProblem, p: Float64Array, jacobian: Float64Array[]): void {
  const ahead = new Float64Array(problem.count)
  const behind = new Float64Array(problem.count)
  const moved = Float64Array.from(p)
  for (let a = 0; a < p.length; a++) {
    const step = 6e-6 * Math.max(Math.abs(p[a]!), 1e-4)
    moved[a] = p[a]! + step
    problem.residuals(moved, ahead)
    moved[a] = p[a]! - step
    problem.residuals(moved, behind)
    moved[a] = p[a]!
    const column = jacobian[a]!
    for (let i = 0; i < problem.count; i++) column[i] = (ahead[i]! - behind[i]!) / (2 * step)
  }
}

function sumOfSquares(values: Float64Array): number {
  let sum = 0
  for (let i = 0; i < values.length; i++) sum += values[i]! * values[i]!
  return sum
}

function normalMatrix(jacobian: readonly Float64Array[], residuals: Float64Array) {
  const size = jacobian.length
  const normal = new Float64Array(size * size)
  const gradient = new Float64Array(size)
  for (let a = 0; a < size; a++) {
    for (let b = 0; b <= a; b++) {
      let sum = 0
      for (let i = 0; i < residuals.length; i++) sum += jacobian[a]![i]! * jacobian[b]![i]!
      normal[a * size + b] = sum
      normal[b * size + a] = sum
    }
    let sum = 0
    for (let i = 0; i < residuals.length; i++) sum -= jacobian[a]![i]! * residuals[i]!
    gradient[a] = sum
  }
  return { normal, gradient }
}

function damped(normal: Float64Array, gradient: Float64Array, damping: number): Float64Array | null {
  const size = gradient.length
  const matrix = Float64Array.from(normal)
  for (let a = 0; a < size; a++) matrix[a * size + a]! *= 1 + damping
  const inverse = invertSymmetric(matrix, size)
  if (!inverse) return null
  return gradient.map((_, a) => {
    let sum = 0
    for (let b = 0; b < size; b++) sum += inverse[a * size + b]! * gradient[b]!
    return sum
  })
}

/**
 * Levenberg-Marquardt (Marquardt 1963) with central differences. Returns null when the start is not finite or the normal matrix stays singular:
 * the readings do not determine the parameters.
 */
export function leastSquares(problem: LeastSquaresProblem): LeastSquaresSolution | null {
  const size = problem.start.length
  let p = Float64Array.from(problem.start)
  let residuals = new Float64Array(problem.count)
  problem.residuals(p, residuals)
  let chiSquared = sumOfSquares(residuals)
  if (!Number.isFinite(chiSquared)) return null
  const jacobian = Array.from({ length: size }, () => new Float64Array(problem.count))
  let damping = 1e-3
  let iterations = 0
  const limit = problem.iterations ?? 60
  differentiate(problem, p, jacobian)
  let { normal, gradient } = normalMatrix(jacobian, residuals)
  while (iterations++ < limit && damping < 1e10) {
    const move = damped(normal, gradient, damping)
    const next = move ? p.map((value, a) => value + move[a]!) : null
    const trial = new Float64Array(problem.count)
    if (next) problem.residuals(next, trial)
    const chi = next ? sumOfSquares(trial) : Number.NaN
    if (!next || !(chi <= chiSquared)) {
      damping *= 8
      continue
    }
    const gain = chiSquared - chi
    p = next
    residuals = trial
    chiSquared = chi
    damping = Math.max(1e-12, damping / 10)
    differentiate(problem, p, jacobian)
    ;({ normal, gradient } = normalMatrix(jacobian, residuals))
    if (gain <= 1e-13 * chiSquared) break
  }
  const covariance = invertSymmetric(normal, size)
  return covariance ? { parameters: p, chiSquared, covariance, residuals, iterations } : null
}

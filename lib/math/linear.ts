/** Small symmetric systems, as least squares with a handful of unknowns needs them. Matrices are row by row. */

/** Inverse of a symmetric positive definite n x n matrix by Cholesky; null when it is not positive definite. */
export function invertSymmetric(matrix: Float64Array, n: number): Float64Array | null {
  const lower = new Float64Array(n * n)
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i * n + j]!
      for (let k = 0; k < j; k++) sum -= lower[i * n + k]! * lower[j * n + k]!
      if (i === j) {
        if (!(sum > 1e-14 * Math.abs(matrix[i * n + i]!))) return null
        lower[i * n + i] = Math.sqrt(sum)
      } else lower[i * n + j] = sum / lower[j * n + j]!
    }
  }
  const inverse = new Float64Array(n * n)
  const column = new Float64Array(n)
  for (let c = 0; c < n; c++) {
    for (let i = 0; i < n; i++) {
      let sum = i === c ? 1 : 0
      for (let k = 0; k < i; k++) sum -= lower[i * n + k]! * column[k]!
      column[i] = sum / lower[i * n + i]!
    }
    for (let i = n - 1; i >= 0; i--) {
      let sum = column[i]!
      for (let k = i + 1; k < n; k++) sum -= lower[k * n + i]! * inverse[k * n + c]!
      inverse[i * n + c] = sum / lower[i * n + i]!
    }
  }
  return inverse
}

/** Solves a symmetric positive definite n x n system by Cholesky, in place of the right-hand side; false when it is not positive definite. */
export function solveSymmetric(matrix: Float64Array, rightHandSide: Float64Array, n: number): boolean {
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i * n + j]!
      for (let k = 0; k < j; k++) sum -= matrix[i * n + k]! * matrix[j * n + k]!
      if (i === j) {
        if (!(sum > 1e-14 * Math.abs(matrix[i * n + i]!))) return false
        matrix[i * n + i] = Math.sqrt(sum)
      } else matrix[i * n + j] = sum / matrix[j * n + j]!
    }
  }
  for (let i = 0; i < n; i++) {
    let sum = rightHandSide[i]!
    for (let k = 0; k < i; k++) sum -= matrix[i * n + k]! * rightHandSide[k]!
    rightHandSide[i] = sum / matrix[i * n + i]!
  }
  for (let i = n - 1; i >= 0; i--) {
    let sum = rightHandSide[i]!
    for (let k = i + 1; k < n; k++) sum -= matrix[k * n + i]! * rightHandSide[k]!
    rightHandSide[i] = sum / matrix[i * n + i]!
  }
  return true
}

/** Other ways to a standard error of a straight line with correlated residuals, to hold the product's own against; none of them is used by it. */

export type Line = { intercept: number; slope: number; slopeSe: number; residuals: number[] }

type Matrix = [number, number, number, number]

function inverse([a, b, c, d]: Matrix): Matrix {
  const determinant = a * d - b * c
  return [d / determinant, -b / determinant, -c / determinant, a / determinant]
}

const times = (p: Matrix, q: Matrix): Matrix => [
  p[0] * q[0] + p[1] * q[2],
  p[0] * q[1] + p[1] * q[3],
  p[2] * q[0] + p[3] * q[2],
  p[2] * q[1] + p[3] * q[3],
]

/** Least squares of y on the two columns of each row of x. */
function fit(
  x: readonly (readonly [number, number])[],
  y: readonly number[],
): { coefficients: [number, number]; bread: Matrix; residuals: number[] } {
  const sum = (of: (i: number) => number) => x.reduce((total, _, i) => total + of(i), 0)
  const at = (i: number) => x[i] as readonly [number, number]
  const cross = sum((i) => at(i)[0] * at(i)[1])
  const bread = inverse([sum((i) => at(i)[0] ** 2), cross, cross, sum((i) => at(i)[1] ** 2)])
  const [u, v] = [sum((i) => at(i)[0] * (y[i] as number)), sum((i) => at(i)[1] * (y[i] as number))]
  const coefficients: [number, number] = [bread[0] * u + bread[1] * v, bread[2] * u + bread[3] * v]
  const residuals = y.map((value, i) => value - coefficients[0] * at(i)[0] - coefficients[1] * at(i)[1])
  return { coefficients, bread, residuals }
}

const rowsOf = (t: readonly number[]) => t.map((time) => [1, time] as const)

/** Lag-one correlation of residuals about zero. */
export function lagOne(residuals: readonly number[]): number {
  const products = residuals.slice(1).reduce((sum, r, i) => sum + r * (residuals[i] as number), 0)
  return products / residuals.reduce((sum, r) => sum + r * r, 0)
}

/** Slope of each residual on the one before it: how the iterated Prais–Winsten fit takes the correlation. */
export function regressedOnLast(residuals: readonly number[]): number {
  const before = residuals.slice(0, -1)
  const products = before.reduce((sum, r, i) => sum + r * (residuals[i + 1] as number), 0)
  return products / before.reduce((sum, r) => sum + r * r, 0)
}

/**
 * Newey–West standard error of the slope with Bartlett weights up to `lags`, without a small-sample factor.
 * @source Newey and West 1987 (from memory)
 */
export function neweyWest(t: readonly number[], y: readonly number[], lags: number): Line {
  const x = rowsOf(t)
  const { coefficients, bread, residuals } = fit(x, y)
  const meat: Matrix = [0, 0, 0, 0]
  for (let lag = 0; lag <= lags; lag++) {
    const weight = 1 - lag / (lags + 1)
    for (let i = lag; i < t.length; i++) {
      const [now, then] = [x[i] as readonly [number, number], x[i - lag] as readonly [number, number]]
      const r = weight * (residuals[i] as number) * (residuals[i - lag] as number)
      const add = (a: readonly [number, number], b: readonly [number, number]) => {
        for (const [k, value] of [a[0] * b[0], a[0] * b[1], a[1] * b[0], a[1] * b[1]].entries())
          meat[k] = (meat[k] as number) + r * value
      }
      add(now, then)
      if (lag > 0) add(then, now)
    }
  }
  const variance = times(times(bread, meat), bread)
  return { intercept: coefficients[0], slope: coefficients[1], slopeSe: Math.sqrt(variance[3]), residuals }
}

/**
 * Prais–Winsten fit with a given lag-one correlation; residuals are those of the untransformed line.
 * @source Prais and Winsten 1954 (from memory)
 */
export function praisWinsten(t: readonly number[], y: readonly number[], phi: number): Line {
  const first = Math.sqrt(1 - phi * phi)
  const moved = (values: readonly number[]) =>
    values.map((value, i) => (i === 0 ? first * value : value - phi * (values[i - 1] as number)))
  const ones = moved(t.map(() => 1))
  const times = moved(t)
  const { coefficients, bread, residuals } = fit(
    ones.map((one, i) => [one, times[i] as number] as const),
    moved(y),
  )
  const variance = residuals.reduce((sum, r) => sum + r * r, 0) / (t.length - 2)
  const own = y.map((value, i) => value - coefficients[0] - coefficients[1] * (t[i] as number))
  return {
    intercept: coefficients[0],
    slope: coefficients[1],
    slopeSe: Math.sqrt(variance * bread[3]),
    residuals: own,
  }
}

import type { Reading } from '../sensor'
import { lagOne } from './statistics'

export type Fit = { rate: number; standardErrorOfLn: number; degrees: number }

type Solved = { cost: number; residuals: number[] }

/** Lowest cost of a one-dimensional valley by golden section. */
function golden(cost: (x: number) => number, from: number, to: number): number {
  const share = (Math.sqrt(5) - 1) / 2
  let low = from
  let high = to
  let a = high - share * (high - low)
  let b = low + share * (high - low)
  let fa = cost(a)
  let fb = cost(b)
  for (let i = 0; i < 40; i++) {
    if (fa < fb) {
      high = b
      b = a
      fb = fa
      a = high - share * (high - low)
      fa = cost(a)
    } else {
      low = a
      a = b
      fa = fb
      b = low + share * (high - low)
      fb = cost(b)
    }
  }
  return (low + high) / 2
}

/** Two linear unknowns, y ≈ p u + q v, with a Gaussian prior of weight `lambda` on q about `prior`. */
function twoUnknowns(y: number[], u: number[], v: number[], lambda: number, prior: number): Solved {
  let uu = 0
  let uv = 0
  let vv = lambda
  let uy = 0
  let vy = lambda * prior
  for (let i = 0; i < y.length; i++) {
    uu += u[i]! * u[i]!
    uv += u[i]! * v[i]!
    vv += v[i]! * v[i]!
    uy += u[i]! * y[i]!
    vy += v[i]! * y[i]!
  }
  const determinant = uu * vv - uv * uv
  const p = (uy * vv - vy * uv) / determinant
  const q = (vy * uu - uy * uv) / determinant
  const residuals = y.map((value, i) => value - p * u[i]! - q * v[i]!)
  return { cost: residuals.reduce((sum, r) => sum + r * r, 0) + lambda * (q - prior) ** 2, residuals }
}

/** Interval from the curvature of the profile of the cost in ln A, with an effective number of readings (Santer et al.). */
function withInterval(
  solve: (rate: number) => Solved,
  parameters: number,
): (Fit & { sigma2: number }) | null {
  const ln = golden((x) => solve(Math.exp(x)).cost, Math.log(0.01), Math.log(30))
  const best = solve(Math.exp(ln))
  const n = best.residuals.length
  const phi = lagOne(best.residuals)
  const effective = Math.max(parameters + 1.5, (n * (1 - phi)) / (1 + phi))
  const left = best.residuals.reduce((sum, r) => sum + r * r, 0)
  const h = 0.02
  const curvature = (solve(Math.exp(ln + h)).cost - 2 * best.cost + solve(Math.exp(ln - h)).cost) / (h * h)
  if (!(curvature > 0)) return null
  const sigma2 = left / (effective - parameters)
  const degrees = effective - parameters
  return { rate: Math.exp(ln), standardErrorOfLn: Math.sqrt((2 * sigma2) / curvature), degrees, sigma2 }
}

/** Nonlinear least squares of C = B + E exp(−A t), the background held by a prior of the given standard uncertainty. */
export function fitDecay(rows: readonly Reading[], backgroundPpm: number, backgroundSd: number): Fit | null {
  const hours = rows.map((r) => (r.trueS - rows[0]!.trueS) / 3600)
  const y = rows.map((r) => r.ppm - backgroundPpm)
  const ones = rows.map(() => 1)
  let lambda = 25 / backgroundSd ** 2
  let fit: (Fit & { sigma2: number }) | null = null
  for (let pass = 0; pass < 2; pass++) {
    fit = withInterval((rate) => {
      const u = hours.map((t) => Math.exp(-rate * t))
      return twoUnknowns(y, u, ones, lambda, 0)
    }, 2)
    if (!fit) return null
    lambda = fit.sigma2 / backgroundSd ** 2
  }
  return fit
}

/** As above with air from a measured neighbour: dC/dt = n ((1 − f) Co + f Cn − C), n total, f the neighbour's share. */
export function fitWithNeighbour(
  rows: readonly Reading[],
  outdoorPpm: number,
  neighbourPpm: readonly number[],
): Fit | null {
  const y = rows.map((r) => r.ppm - outdoorPpm)
  const solve = (rate: number) => {
    const u = [1]
    const v = [0]
    for (let i = 1; i < rows.length; i++) {
      const keep = Math.exp((-rate * (rows[i]!.trueS - rows[i - 1]!.trueS)) / 3600)
      const excess = (neighbourPpm[i]! + neighbourPpm[i - 1]!) / 2 - outdoorPpm
      u.push(u[i - 1]! * keep)
      v.push(v[i - 1]! * keep + (1 - keep) * excess)
    }
    return twoUnknowns(y, u, v, 0, 0)
  }
  return withInterval(solve, 3)
}

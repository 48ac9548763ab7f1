import { describe, expect, it } from 'vitest'
import { hodgesLehmann, signedRankCriticalIndex } from '@/lib/math/hodges-lehmann'
import { normalCdf, normalQuantile } from '@/lib/math/normal'
import { studentTCdf, studentTQuantile } from '@/lib/math/student-t'
import { mannKendall, theilSen } from '@/lib/math/theil-sen'

describe('Student t', () => {
  // SciPy 1.17.1: python3 -c "from scipy import stats; print(repr(stats.t.ppf(p, dof)))"
  it.each([
    [0.975, 1, 12.706204736174694],
    [0.975, 2, 4.302652729749462],
    [0.975, 4.119115, 2.745065887438645],
    [0.975, 11, 2.200985160091639],
    [0.975, 30, 2.0422724563012378],
    [0.995, 7.3, 3.451031655622185],
    [0.6, 3, 0.2766706623326898],
    [0.975, 1e6, 1.959966356814107],
    [0.999999, 2.5, 220.17342917570426],
    [0.975, 0.7, 36.611415031588656],
  ])('quantile p %d dof %d', (p, dof, expected) => {
    expect(studentTQuantile(p, dof)).toBeCloseTo(expected, 9 - Math.ceil(Math.log10(expected + 1)))
    expect(studentTQuantile(1 - p, dof) / -expected).toBeCloseTo(1, 7)
    expect(studentTCdf(expected, dof)).toBeCloseTo(p, 10)
  })
  it('refuses what has no quantile', () => {
    expect(() => studentTQuantile(0.9, 0)).toThrow(RangeError)
  })
})

describe('normal distribution', () => {
  // SciPy 1.17.1 stats.norm.cdf and stats.norm.ppf
  it.each([
    [-5, 2.866515718791933e-7],
    [-1.96, 0.024997895148220435],
    [0.3, 0.6179114221889526],
    [2.6, 0.9953388119762813],
  ])('cdf(%d)', (z, p) => {
    expect(normalCdf(z) / p).toBeCloseTo(1, 8)
    expect(normalQuantile(p)).toBeCloseTo(z, 7)
  })
})

describe('robust location', () => {
  // methods.md T45 (derived): one night with the air handler off among six
  const nights = [2.1, 1.95, 2.3, 2.05, 0.45, 2.2, 2.0]
  it('Hodges–Lehmann is not moved by the odd night', () => {
    expect(hodgesLehmann(nights).location).toBeCloseTo(2.05, 9)
  })
  // exact counting: P(W ≤ 0) = 1/64 at n = 6, P(W ≤ 2) = 3/128 at n = 7; n = 10 and 20: tables of the signed-rank test (from memory: 8, 52)
  it.each([
    [5, 0],
    [6, 1],
    [7, 3],
    [10, 9],
    [20, 53],
  ])('exact signed-rank index at n = %i', (n, index) => {
    expect(signedRankCriticalIndex(n)).toBe(index)
  })
  it('the normal approximation takes over without a jump', () => {
    expect(Math.abs(signedRankCriticalIndex(51) - signedRankCriticalIndex(50))).toBeLessThan(20)
    expect(signedRankCriticalIndex(51)).toBeGreaterThan(signedRankCriticalIndex(50))
  })
})

describe('trend', () => {
  // methods.md T46 (derived)
  const series = [2.5, 2.4, 2.45, 2.3, 2.35, 2.2, 2.1, 2.15, 2.0, 1.9]
  it('Mann–Kendall', () => {
    const result = mannKendall(series)
    expect(result.s).toBe(-39)
    expect(result.variance).toBeCloseTo(125, 9)
    expect(result.z).toBeCloseTo(-3.398823, 6)
    expect(result.p).toBeCloseTo(6.7676e-4, 7)
  })
  it('Theil–Sen', () => {
    const x = series.map((_, i) => i)
    const line = theilSen(x, series)
    expect(line.slope).toBeCloseTo(-0.0666667, 6)
    expect(line.low).toBeLessThan(line.slope)
    expect(line.high).toBeGreaterThan(line.slope)
    expect(line.high).toBeLessThan(0)
  })
})

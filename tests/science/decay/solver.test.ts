/**
 * The solvers against certified and independent answers: NIST StRD nonlinear regression (data and certified values from memory of the published
 * files; the certified residual sums confirm the data), and SciPy 1.17.1 curve_fit (numbers stored with the command that made them).
 */
import { describe, expect, it } from 'vitest'
import { fitPiecewise, piecewiseValue, roughStart } from '@/lib/air/decay/piecewise'
import { leastSquares } from '@/lib/math/least-squares'
import { studentTCdf, studentTQuantile } from '@/lib/math/student-t'
import { D2, D3 } from './support/records'

const MISRA1A_Y = [
  10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02, 44.82, 50.76, 55.05, 61.01, 66.4, 75.47, 81.78,
]
const MISRA1A_X = [
  77.6, 114.9, 141.1, 190.8, 239.9, 289, 332.8, 378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760,
]

const CHWIRUT2 = [
  [92.9, 0.5],
  [57.1, 1],
  [31.05, 1.75],
  [11.5875, 3.75],
  [8.025, 5.75],
  [63.6, 0.875],
  [21.4, 2.25],
  [14.25, 3.25],
  [8.475, 5.25],
  [63.8, 0.75],
  [26.8, 1.75],
  [16.4625, 2.75],
  [7.125, 4.75],
  [67.3, 0.625],
  [41, 1.25],
  [21.15, 2.25],
  [8.175, 4.25],
  [81.5, 0.5],
  [13.12, 3],
  [59.9, 0.75],
  [14.62, 3],
  [32.9, 1.5],
  [5.44, 6],
  [12.56, 3],
  [5.44, 6],
  [32, 1.5],
  [13.95, 3],
  [75.8, 0.5],
  [20, 2],
  [10.42, 4],
  [59.5, 0.75],
  [21.67, 2],
  [8.55, 5],
  [62, 0.75],
  [20.2, 2.25],
  [7.76, 3.75],
  [3.75, 5.75],
  [11.81, 3],
  [54.7, 0.75],
  [23.7, 2.5],
  [11.55, 4],
  [61.3, 0.75],
  [17.7, 2.5],
  [8.74, 4],
  [59.2, 0.75],
  [16.3, 2.5],
  [8.62, 4],
  [81, 0.5],
  [4.87, 6],
  [14.62, 3],
  [81.7, 0.5],
  [17.17, 2.75],
  [81.3, 0.5],
  [28.9, 1.75],
] as const

const relative = (value: number, expected: number) => Math.abs(value / expected - 1)

describe('NIST StRD', () => {
  it.each([
    [500, 0.0001],
    [250, 0.0005],
  ])('Misra1a from %f, %f: parameters to 1e-6, standard deviations to 1e-4', (b1, b2) => {
    const fit = leastSquares({
      count: 14,
      start: [b1, b2],
      iterations: 500,
      residuals: (p, out) => {
        for (let i = 0; i < 14; i++) out[i] = MISRA1A_Y[i]! - p[0]! * (1 - Math.exp(-p[1]! * MISRA1A_X[i]!))
      },
    })!
    expect(relative(fit.parameters[0]!, 2.3894212918e2)).toBeLessThan(1e-6)
    expect(relative(fit.parameters[1]!, 5.5015643181e-4)).toBeLessThan(1e-6)
    expect(relative(fit.chiSquared, 1.2455138894e-1)).toBeLessThan(1e-8)
    const s2 = fit.chiSquared / 12
    expect(relative(Math.sqrt(s2 * fit.covariance[0]!), 2.7070075241)).toBeLessThan(1e-4)
    expect(relative(Math.sqrt(s2 * fit.covariance[3]!), 7.2668688436e-6)).toBeLessThan(1e-4)
  })

  it.each([
    [0.1, 0.01, 0.02],
    [0.15, 0.008, 0.01],
  ])('Chwirut2 from %f, %f, %f', (...start) => {
    const fit = leastSquares({
      count: 54,
      start,
      iterations: 500,
      residuals: (p, out) => {
        CHWIRUT2.forEach(([y, x], i) => {
          out[i] = y - Math.exp(-p[0]! * x) / (p[1]! + p[2]! * x)
        })
      },
    })!
    expect(relative(fit.chiSquared, 5.1304802941e2)).toBeLessThan(1e-8)
    expect(relative(fit.parameters[0]!, 1.6657666537e-1)).toBeLessThan(1e-5)
    expect(relative(fit.parameters[1]!, 5.1653291286e-3)).toBeLessThan(1e-5)
    expect(relative(fit.parameters[2]!, 1.2150007096e-2)).toBeLessThan(1e-5)
  })

  it('says so when the readings do not determine the parameters', () => {
    const residuals = (p: Float64Array, out: Float64Array) => out.fill(p[0]! + p[1]! - 1)
    expect(leastSquares({ count: 5, start: [0, 0], residuals })).toBeNull()
  })
})

/**
 * python3 -c "import numpy as np; from scipy.optimize import curve_fit; D2=[…]; x=np.arange(25)/12;
 *   print(curve_fit(lambda x,e,a,b: b+e*np.exp(-a*x), x, D2, p0=[800,1,420]))"
 * and the same with b = 420, and for D3 with 420+e*np.exp(-(a1*np.minimum(x,.75)+a2*np.maximum(0,x-.75))), p0=[900,2,.5].
 */
describe('SciPy curve_fit', () => {
  const plain = (record: { timeH: Float64Array; ppm: Float64Array }) => ({
    ...record,
    sdPpm: record.ppm.map(() => 1),
  })

  it('free background', () => {
    const data = plain(D2)
    const fit = fitPiecewise(data, 0, [], null, roughStart(data, 420), 60, 1e-13)!
    expect(relative(Math.exp(fit.logStartExcess), 799.7782083186462)).toBeLessThan(1e-6)
    expect(relative(fit.ratesPerHour[0]!, 1.231409381269099)).toBeLessThan(1e-6)
    expect(relative(fit.backgroundPpm, 428.63962077942665)).toBeLessThan(1e-6)
  })

  it('known background', () => {
    const data = plain(D2)
    const fit = fitPiecewise(data, 0, [], { ppm: 420, sdPpm: 1e-5 }, roughStart(data, 420), 60, 1e-13)!
    expect(relative(fit.ratesPerHour[0]!, 1.1984668602904611)).toBeLessThan(1e-6)
  })

  it('two rates with a known break', () => {
    const data = plain(D3)
    const start = { ...roughStart(data, 420), ratesPerHour: [2, 0.5] }
    const fit = fitPiecewise(data, 0, [0.75], { ppm: 420, sdPpm: 1e-5 }, start, 60, 1e-13)!
    expect(relative(fit.ratesPerHour[0]!, 2.399616776253859)).toBeLessThan(1e-6)
    expect(relative(fit.ratesPerHour[1]!, 0.40053217482935094)).toBeLessThan(1e-6)
    expect(relative(piecewiseValue(fit, 0), 420 + 899.9080839263039)).toBeLessThan(1e-6)
  })

  it('Student quantiles: scipy.stats.t.ppf(0.975, d)', () => {
    for (const [degrees, quantile] of [
      [1, 12.706204736432095],
      [2, 4.302652729911275],
      [3.5, 2.9400886379827775],
      [4.119115, 2.7450658874386478],
      [11, 2.200985160082949],
      [60, 2.0002978210582616],
    ] as const) {
      expect(relative(studentTQuantile(0.975, degrees), quantile)).toBeLessThan(1e-8)
      expect(Math.abs(studentTCdf(quantile, degrees) - 0.975)).toBeLessThan(1e-10)
    }
  })
})

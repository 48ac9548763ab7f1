/** Check values of the methods page (T1 to T17, T50, T52 to T54, T56): derived there in closed form or by quadrature, except where said. */
import { describe, expect, it } from 'vitest'
import { demandExcess } from '@/lib/air/decay/demand'
import { backgroundBias, logLine, threePointRate, twoPointRate } from '@/lib/air/decay/log-linear'
import { steadyExcessPpm } from '@/lib/air/decay/people'
import { fitPiecewise, roughStart } from '@/lib/air/decay/piecewise'
import {
  biasCorrectedCorrelation,
  effectiveSampleSize,
  slopeErrorInflation,
} from '@/lib/math/autocorrelation'
import { studentTQuantile } from '@/lib/math/student-t'
import { localToEpochS } from '@/lib/time'
import { D1, D2, D3 } from './support/records'

const near = (value: number, expected: number, relative = 1e-5) =>
  expect(Math.abs(value - expected)).toBeLessThanOrEqual(relative * Math.abs(expected))

const plain = (record: { timeH: Float64Array; ppm: Float64Array }) => ({
  ...record,
  sdPpm: record.ppm.map(() => 1),
})
const known = (ppm: number) => ({ ppm, sdPpm: 1e-4 })

/** Standard error of the first rate with the residual variance of the fit. */
function standardError(fit: NonNullable<ReturnType<typeof fitPiecewise>>, unknowns: number): number {
  const size = fit.ratesPerHour.length + 3
  const sse = fit.residuals.reduce((sum, r) => sum + r * r, 0)
  return Math.sqrt((fit.covariance[size + 1]! * sse) / (fit.points - unknowns))
}

describe('two and three points', () => {
  it('T1, T2: two-point rate and what a wrong background makes of it', () => {
    near(twoPointRate(1200, 600, 420, 1.5), 0.977558)
    for (const [background, rate] of [
      [400, 0.924196],
      [440, 1.03876],
      [450, 1.07296],
      [380, 0.877117],
    ] as const)
      near(twoPointRate(1200, 600, background, 1.5), rate)
  })

  it('has no figure at or below the background', () => {
    expect(twoPointRate(1200, 400, 420, 1)).toBeNaN()
  })

  it('T3, T4, T5: three equally spaced levels, falling and rising', () => {
    const decay = threePointRate(1200, 900, 750, 0.5)
    near(decay.ratePerHour, 1.386294)
    near(decay.finalPpm, 600)
    const rise = threePointRate(500, 750, 900, 0.25)
    near(rise.ratePerHour, 2.043302)
    near(rise.finalPpm, 1125)
    const other = threePointRate(500, 854.122406, 1068.908503, 0.25)
    near(other.ratePerHour, 2)
    near(other.finalPpm, 1400)
  })
})

describe('record D1', () => {
  it('T6: log-linear least squares with its ordinary interval', () => {
    const line = logLine(D1.timeH, D1.ppm, 420)
    near(line.ratePerHour, 1.117652)
    near(line.standardErrorPerHour, 0.00546147)
    near(line.startExcessPpm, 765.4733)
    near(line.residualSd, 0.00613994)
    near(line.rSquared, 0.9997374, 1e-7)
    near(line.durbinWatson, 3.37097)
    near(line.lagOne, -0.6942, 1e-3)
    const t = studentTQuantile(0.975, 11)
    near(t, 2.200985, 1e-6)
    near(line.ratePerHour - t * line.standardErrorPerHour, 1.105632)
    near(line.ratePerHour + t * line.standardErrorPerHour, 1.129673)
  })

  it('T7: weighted, nonlinear with known and with free background, two-point', () => {
    near(logLine(D1.timeH, D1.ppm, 420, true).ratePerHour, 1.118546)
    const fixed = fitPiecewise(plain(D1), 0, [], known(420), roughStart(plain(D1), 420))!
    near(fixed.ratesPerHour[0]!, 1.118607)
    near(standardError(fixed, 2), 0.005753, 1e-3)
    const free = fitPiecewise(plain(D1), 0, [], null, roughStart(plain(D1), 420), 60, 1e-12)!
    near(free.ratesPerHour[0]!, 1.126578)
    near(free.backgroundPpm, 423.293)
    near(standardError(free, 3), 0.037721, 1e-3)
    near(twoPointRate(1185, 671, 420, 1), 1.114423)
  })
})

describe('record D2, autocorrelated', () => {
  it('T8, T9: naive interval and the effective number of readings', () => {
    const line = logLine(D2.timeH, D2.ppm, 420)
    near(line.ratePerHour, 1.186383)
    near(line.standardErrorPerHour, 0.012604)
    near(line.startExcessPpm, 799.815)
    near(line.durbinWatson, 0.604411)
    near(line.lagOne, 0.60673)
    const effective = effectiveSampleSize(25, line.lagOne)
    near(effective, 6.119115)
    const widened = line.standardErrorPerHour * Math.sqrt((25 - 2) / (effective - 2))
    near(widened, 0.0297831)
    near(studentTQuantile(0.975, effective - 2) * widened, 0.0817566)
    near(biasCorrectedCorrelation(line.lagOne, 25), 0.783806)
  })

  it('T12: nonlinear with known and with free background', () => {
    const fixed = fitPiecewise(plain(D2), 0, [], known(420), roughStart(plain(D2), 420))!
    near(fixed.ratesPerHour[0]!, 1.198467)
    near(standardError(fixed, 2), 0.010032, 1e-3)
    const free = fitPiecewise(plain(D2), 0, [], null, roughStart(plain(D2), 420), 60, 1e-12)!
    near(free.ratesPerHour[0]!, 1.231409)
    near(free.backgroundPpm, 428.64)
    near(standardError(free, 3), 0.028657, 1e-3)
  })
})

describe('changes, bias, people, demand', () => {
  it('T13: two rates with the break on the grid; fitted in ppm, so to a thousandth', () => {
    const data = plain(D3)
    const start = { ...roughStart(data, 420), ratesPerHour: [2, 0.5] }
    let best = fitPiecewise(data, 0, [0.5], known(420), start)!
    for (const breakH of D3.timeH.slice(3, -3)) {
      const fit = fitPiecewise(data, 0, [breakH], known(420), start)
      if (fit && fit.chiSquared < best.chiSquared) best = fit
    }
    near(best.breaksH[0]!, 0.75, 1e-12)
    near(best.ratesPerHour[0]!, 2.398903, 1e-3)
    near(best.ratesPerHour[1]!, 0.400644, 3e-3)
    near(logLine(D3.timeH, D3.ppm, 420).ratePerHour, 0.727529)
  })

  it('T14: one line over two slopes gives neither, nor their mean', () => {
    const timeH = Float64Array.from({ length: 49 }, (_, i) => i / 12)
    const ppm = timeH.map((t) => 420 + 900 * Math.exp(-(t < 0.5 ? 3 * t : 1.5 + 0.3 * (t - 0.5))))
    near(logLine(timeH, ppm, 420).ratePerHour, 0.429214)
  })

  it('T15, T16: a background 20 ppm too high, 50 ppm too low', () => {
    const timeH = Float64Array.from({ length: 201 }, (_, i) => i / 100)
    const ppm = timeH.map((t) => 420 + 800 * Math.exp(-t))
    near(logLine(timeH, ppm, 440).ratePerHour, 1.0827, 1e-4)
    near(logLine(timeH, ppm, 370).ratePerHour, 0.846, 1e-4)
    near(backgroundBias(20, 800, 2), 0.075)
    near(twoPointRate(ppm[0]!, ppm[200]!, 440, 2), 1.0895, 1e-4)
    near(twoPointRate(ppm[0]!, ppm[200]!, 370, 2), 0.8405, 1e-4)
  })

  it('T17: a cleaner keeps up a floor of 144 ppm and hides four tenths of the rate', () => {
    near(steadyExcessPpm(0.008, 1, 200), 144)
    const timeH = Float64Array.from({ length: 121 }, (_, i) => i / 60)
    const ppm = timeH.map((t) => 420 + 144 + (800 - 144) * Math.exp(-t))
    near(logLine(timeH, ppm, 420).ratePerHour, 0.620652)
  })

  it('T50: demand control, closed form', () => {
    for (const [t, excess] of [
      [0.25, 444.719],
      [0.5, 295.841],
      [1, 163.521],
      [2, 70.736],
    ] as const)
      near(demandExcess(t, 800, 0.5, 2.5), excess)
    const timeH = Float64Array.from({ length: 25 }, (_, i) => i / 12)
    const ppm = timeH.map((t) => 420 + demandExcess(t, 800, 0.5, 2.5))
    near(logLine(timeH, ppm, 420).ratePerHour, 1.128146)
  })
})

describe('time, altitude, patience, correlation', () => {
  it('T52: hours across both clock changes', () => {
    const hours = (date: string) =>
      (localToEpochS(date, '03:30', 'Europe/Berlin') - localToEpochS(date, '01:30', 'Europe/Berlin')) / 3600
    expect(hours('2026-10-25')).toBe(3)
    expect(hours('2026-03-29')).toBe(1)
    near(Math.log(1000 / 300) / hours('2026-10-25'), 0.401324)
    near(Math.log(1000 / 300) / hours('2026-03-29'), 1.203973)
  })

  it('T53: an uncorrected sensor at altitude ruins a fixed background, not its own', () => {
    const timeH = Float64Array.from({ length: 201 }, (_, i) => i / 100)
    const read = timeH.map((t) => (425 + 800 * Math.exp(-t)) / 1.19832)
    near(logLine(timeH, read, 425).ratePerHour, 1.5505, 1e-3)
    near(logLine(timeH, read, 425 / 1.19832).ratePerHour, 1)
  })

  it('T54: how long a room takes to show its background', () => {
    near(Math.log(800 / 10) / 0.5, 8.7641, 1e-4)
    near(Math.log(800 / 10) / 0.1, 43.8203, 1e-4)
  })

  it('T56: exact inflation of a slope’s standard error under AR(1)', () => {
    near(slopeErrorInflation(60, 0.7), 2.2126, 1e-4)
    near(slopeErrorInflation(60, 0), 1)
  })

  it('E741 two-sample durations (from memory): rate times duration is one', () => {
    for (const [rate, hours] of [
      [0.25, 4],
      [0.5, 2],
      [1, 1],
      [2, 0.5],
      [4, 0.25],
    ] as const)
      near(twoPointRate(420 + 800, 420 + 800 / Math.E, 420, hours), rate)
  })
})

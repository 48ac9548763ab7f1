import { describe, expect, it } from 'vitest'
import {
  fastestRisePpmPerMin,
  findBaselineSteps,
  findDrift,
  findOwnDrift,
  findSpikes,
  findStuck,
  type NightLow,
  offsetAgainstFellows,
  outOfRangeShares,
  pressureAtAltitudeKPa,
  pressureFactor,
} from '@/lib/air/sensor-quality'
import { seededRandom } from '@/lib/math/seeded'
import { addDays } from '@/lib/time'

const minutes = (values: readonly number[]) => ({
  timeS: Float64Array.from(values, (_, i) => i * 60),
  co2Ppm: Float64Array.from(values),
})

/** Nightly lows of one sensor: a common outdoor course, own noise, offset, drift a month, steps. */
function lows(
  seed: number,
  over: { offset?: number; perMonth?: number; step?: [number, number]; nights?: number } = {},
): NightLow[] {
  const random = seededRandom(seed)
  const weather = seededRandom(4711)
  return Array.from({ length: over.nights ?? 60 }, (_, i) => {
    const outdoor = 430 + 10 * Math.sin(i / 4) + 4 * weather.normal()
    const step = over.step && i >= over.step[0] ? over.step[1] : 0
    const lowPpm = outdoor + (over.offset ?? 0) + ((over.perMonth ?? 0) * i) / 30 + step + 4 * random.normal()
    return { night: addDays('2026-01-01', i), lowPpm }
  })
}

describe('pressure', () => {
  it('T40: 800 ppm read at 84.5 kPa and 25 °C is 959.290 ppm (ideal gas)', () => {
    expect(800 * pressureFactor(84.5)).toBeCloseTo(959.29, 3)
    expect(800 * pressureFactor(84.5, 293.15)).toBeCloseTo(943.203, 3)
  })
  it('T41: 84.5560 kPa at 1500 m, factor 1.198318; further altitudes (ISA)', () => {
    expect(pressureAtAltitudeKPa(1500)).toBeCloseTo(84.556, 3)
    expect(pressureFactor(pressureAtAltitudeKPa(1500))).toBeCloseTo(1.198318, 6)
    for (const [altitude, factor] of [
      [500, 1.06143],
      [1000, 1.1274],
      [2000, 1.27461],
      [2500, 1.35674],
    ] as const) {
      expect(pressureFactor(pressureAtAltitudeKPa(altitude))).toBeCloseTo(factor, 5)
    }
    expect(() => pressureAtAltitudeKPa(20_000)).toThrow(/altitude/)
    expect(() => pressureFactor(1013)).toThrow(/kPa/)
  })
})

describe('single readings', () => {
  const random = seededRandom(3)
  const noisy = Array.from({ length: 600 }, (_, i) =>
    Math.round(800 + 100 * Math.sin(i / 80) + 4 * random.normal()),
  )
  it('a value repeated for hours is stuck; saturation, a coarse step and on-change reporting are not', () => {
    const stuck = [...noisy.slice(0, 100), ...new Array(200).fill(812), ...noisy.slice(300)]
    const found = findStuck(minutes(stuck))
    expect(found).toHaveLength(1)
    expect(Math.abs(found[0]!.fromS - 6000)).toBeLessThanOrEqual(60)
    expect(found[0]!.readings).toBeGreaterThanOrEqual(200)
    expect(findStuck(minutes(noisy))).toEqual([])
    expect(findStuck(minutes(new Array(300).fill(2000)), { rangeMaxPpm: 2000 })).toEqual([])
    expect(findStuck(minutes(new Array(300).fill(440)), { resolutionPpm: 10 })).toEqual([])
    expect(findStuck(minutes(new Array(300).fill(440)), { reporting: 'on-change' })).toEqual([])
  })
  it('spikes are found where they are and nowhere else', () => {
    const spiked = [...noisy]
    spiked[50] = 1500
    spiked[300] = 420
    expect(findSpikes(minutes(spiked))).toEqual([50, 300])
    expect(findSpikes(minutes(noisy))).toEqual([])
    expect(findSpikes(minutes(new Array(50).fill(500)))).toEqual([])
    // a real rise of a full room is no spike
    expect(findSpikes(minutes(Array.from({ length: 60 }, (_, i) => 500 + 48 * i)))).toEqual([])
  })
  it('range, with the pressure of the place', () => {
    expect(outOfRangeShares(minutes([340, 420, 6000, 800]))).toEqual({ below: 0.25, above: 0.25 })
    expect(outOfRangeShares(minutes([340, 420]), pressureFactor(84.5))).toEqual({ below: 0, above: 0 })
    expect(outOfRangeShares(minutes([]))).toEqual({ below: 0, above: 0 })
  })
  it('30 people in 180 m³ raise a room by 48.0 ppm a minute at most (derived)', () => {
    expect(fastestRisePpmPerMin(30, 0.0048, 180)).toBeCloseTo(48, 6)
  })
})

describe('against its fellows', () => {
  const fellows = [lows(11), lows(12, { offset: 8 }), lows(13, { offset: -6 })]
  it('a drift of 12 ppm a month is found, the weather and an offset are not one', () => {
    const drift = findDrift(lows(1, { perMonth: 12 }), fellows)!
    expect(Math.abs(drift.ppmPerMonth - 12)).toBeLessThan(3)
    expect(drift.lowPpmPerMonth).toBeLessThanOrEqual(12)
    expect(drift.highPpmPerMonth).toBeGreaterThanOrEqual(12)
    for (let seed = 100; seed < 140; seed++) expect(findDrift(lows(seed, { offset: 25 }), fellows)).toBeNull()
    expect(findDrift(lows(1, { perMonth: 12, nights: 15 }), fellows)).toBeNull()
  })
  it('without fellows a larger drift is still seen', () => {
    expect(findOwnDrift(lows(2, { perMonth: -20 }))!.ppmPerMonth).toBeLessThan(-10)
  })
  it('an offset is measured with its interval', () => {
    const far = offsetAgainstFellows(lows(3, { offset: 60 }), fellows)!
    expect(far.suspect).toBe(true)
    expect(far.lowPpm).toBeLessThan(61)
    expect(far.highPpm).toBeGreaterThan(58)
    expect(offsetAgainstFellows(lows(4, { offset: 12 }), fellows)!.suspect).toBe(false)
    expect(offsetAgainstFellows(lows(4, { nights: 4 }), fellows)).toBeNull()
    expect(offsetAgainstFellows(lows(4), [lows(11)])).toBeNull()
  })
})

describe('baseline steps', () => {
  const fellows = [lows(11), lows(12, { offset: 8 }), lows(13, { offset: -6 })]
  it('a correction that jumps is dated and sized, best against fellows', () => {
    const [step, ...others] = findBaselineSteps(lows(5, { step: [30, -25] }), fellows)
    expect(others).toEqual([])
    expect(step!.onNight).toBe(addDays('2026-01-01', 30))
    expect(Math.abs(step!.stepPpm + 25)).toBeLessThan(5)
    const alone = findBaselineSteps(lows(5, { step: [30, -60] }))
    expect(alone.map((one) => one.onNight)).toEqual([addDays('2026-01-01', 30)])
  })
  it('weather makes none', () => {
    let found = 0
    for (let seed = 200; seed < 240; seed++) {
      found += findBaselineSteps(lows(seed), fellows).length + findBaselineSteps(lows(seed)).length
    }
    expect(found).toBeLessThanOrEqual(1)
  })
})

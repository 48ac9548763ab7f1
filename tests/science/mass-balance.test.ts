import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import {
  fanEnergyKWh,
  heatingEnergyKWh,
  latentPowerW,
  sensiblePowerW,
  spareAirEnergy,
} from '@/lib/air/energy'
import {
  co2AfterStepPpm,
  co2CoursePpm,
  fitBuildUp,
  fitTransientBalance,
  flowPerPersonLps,
  headcount,
  meanBuildUpExcessPpm,
  outdoorAirFraction,
  REBREATHED_CAUTION,
  rebreathedFraction,
  relativeRebreathed,
  steadyFlowLps,
  steadyFlowPerPersonLps,
  threePointRate,
} from '@/lib/air/mass-balance'
import { seededRandom } from '@/lib/math/seeded'

const room = {
  backgroundPpm: 420,
  persons: 25,
  generationLpsPerPerson: 0.0048,
  volumeM3: 180,
  airChangeRatePerHour: 3,
}

describe('the balance of one room', () => {
  it('T18: 25 people, 180 m³, 3/h reach 1180.170 ppm in an hour, 1041.496 in half of it (derived)', () => {
    expect(co2AfterStepPpm({ ...room, co2Ppm: 420, durationS: 3600 })).toBeCloseTo(1180.17, 3)
    expect(co2AfterStepPpm({ ...room, co2Ppm: 420, durationS: 1800 })).toBeCloseTo(1041.496, 3)
  })
  it('T19: exact over five minutes (derived)', () => {
    const step = {
      co2Ppm: 800,
      backgroundPpm: 420,
      persons: 10,
      generationLpsPerPerson: 0.0052,
      volumeM3: 200,
      airChangeRatePerHour: 1.44,
    }
    expect(co2AfterStepPpm({ ...step, durationS: 300 })).toBeCloseTo(830.5315, 3)
  })
  it('does not depend on how a stretch is cut (property)', () => {
    const number = (min: number, max: number) => fc.double({ min, max, noNaN: true })
    fc.assert(
      fc.property(
        number(400, 3000),
        number(0, 12),
        fc.integer({ min: 0, max: 40 }),
        number(1, 7200),
        number(0.01, 0.99),
        (co2Ppm, airChangeRatePerHour, persons, durationS, cut) => {
          const base = { ...room, co2Ppm, airChangeRatePerHour, persons }
          const whole = co2AfterStepPpm({ ...base, durationS })
          const first = co2AfterStepPpm({ ...base, durationS: durationS * cut })
          const second = co2AfterStepPpm({ ...base, co2Ppm: first, durationS: durationS * (1 - cut) })
          expect(Math.abs(second - whole)).toBeLessThan(1e-6 * Math.abs(whole))
        },
      ),
      { seed: 7 },
    )
  })
  it('agrees with small explicit steps of the differential equation, and without air change rises straight', () => {
    let c = 600
    for (let i = 0; i < 36_000; i++) c += 0.1 * ((1e6 * 25 * 0.0048) / 180_000 + (3 / 3600) * (420 - c))
    expect(co2AfterStepPpm({ ...room, co2Ppm: 600, durationS: 3600 })).toBeCloseTo(c, 0)
    expect(co2AfterStepPpm({ ...room, airChangeRatePerHour: 0, co2Ppm: 600, durationS: 60 })).toBeCloseTo(
      640,
      6,
    )
    expect(() => co2AfterStepPpm({ ...room, volumeM3: 0, co2Ppm: 600, durationS: 60 })).toThrow(/volume/)
  })
  it('a course follows its steps', () => {
    const step = { backgroundPpm: 420, airChangeRatePerHour: 3, durationS: 1800 }
    const course = co2CoursePpm({ co2Ppm: 420, volumeM3: 180, generationLpsPerPerson: 0.0048 }, [
      { ...step, persons: 25 },
      { ...step, persons: 25 },
      { ...step, persons: 0 },
    ])
    expect(course[1]).toBeCloseTo(1180.17, 3)
    expect(course[2]).toBeCloseTo(420 + 760.17 * Math.exp(-1.5), 3)
  })
  it('T20: steady flow per person; an unsteady peak overstates it by 1.582 after one time constant (derived)', () => {
    const g = 0.0048
    expect(
      steadyFlowLps({ co2Ppm: 1000, backgroundPpm: 420, persons: 1, generationLpsPerPerson: g }),
    ).toBeCloseTo(8.275862, 6)
    const peak = co2AfterStepPpm({ ...room, co2Ppm: 420, durationS: 1200 })
    expect(
      steadyFlowLps({ co2Ppm: peak, backgroundPpm: 420, persons: 25, generationLpsPerPerson: g }) / 150,
    ).toBeCloseTo(1.582, 3)
    expect(() =>
      steadyFlowLps({ co2Ppm: 400, backgroundPpm: 420, persons: 1, generationLpsPerPerson: g }),
    ).toThrow(/above/)
  })
  it('T51: share of outdoor air (ASTM D6245 formula), and silence where the readings cannot tell', () => {
    const fraction = outdoorAirFraction({ returnPpm: 1000, supplyPpm: 700, outdoorPpm: 420, uPpm: 20 })!
    expect(100 * fraction.value).toBeCloseTo(51.7241, 4)
    expect(fraction.standardUncertainty).toBeCloseTo((20 / 580) * Math.sqrt(0.4828 ** 2 + 1 + 0.5172 ** 2), 4)
    expect(outdoorAirFraction({ returnPpm: 500, supplyPpm: 460, outdoorPpm: 420, uPpm: 20 })).toBeNull()
  })
})

describe('build-up', () => {
  it('three equally spaced levels (T3 to T5, derived)', () => {
    expect(threePointRate([1200, 900, 750], 1800)!.airChangeRatePerHour).toBeCloseTo(1.386294, 6)
    expect(threePointRate([1200, 900, 750], 1800)!.finalPpm).toBeCloseTo(600, 9)
    expect(threePointRate([500, 750, 900], 900)!.airChangeRatePerHour).toBeCloseTo(2.043302, 6)
    expect(threePointRate([500, 750, 900], 900)!.finalPpm).toBeCloseTo(1125, 9)
    expect(threePointRate([500, 854.122406, 1068.908503], 900)!.airChangeRatePerHour).toBeCloseTo(2, 6)
    expect(threePointRate([500, 600, 800], 900)).toBeNull()
  })
  const rise = (rate: number, hours: number, noisePpm: number, seed: number) => {
    const random = seededRandom(seed)
    const n = Math.round(hours * 60)
    const timeS = Float64Array.from({ length: n }, (_, i) => i * 60)
    const co2Ppm = timeS.map((t) => 1400 - 900 * Math.exp((-rate * t) / 3600) + noisePpm * random.normal())
    return { timeS, co2Ppm }
  }
  it('finds the rate without knowing people or background, and its interval holds', () => {
    let held = 0
    for (let seed = 1; seed <= 60; seed++) {
      const fit = fitBuildUp(rise(2.5, 1.2, 8, seed))
      if (fit.airChangeRatePerHour === null) throw new Error(fit.reason)
      expect(Math.abs(fit.airChangeRatePerHour / 2.5 - 1)).toBeLessThan(0.15)
      if (fit.lowPerHour <= 2.5 && fit.highPerHour >= 2.5) held++
    }
    expect(held / 60).toBeGreaterThanOrEqual(0.9)
  })
  it('refuses what cannot be told', () => {
    expect(fitBuildUp(rise(0.4, 1, 8, 1))).toMatchObject({ airChangeRatePerHour: null })
    expect(fitBuildUp(rise(2, 0.1, 8, 1))).toMatchObject({ reason: 'too-few-points' })
    const flat = {
      timeS: Float64Array.from({ length: 60 }, (_, i) => i * 60),
      co2Ppm: new Float64Array(60).fill(700),
    }
    expect(fitBuildUp(flat)).toMatchObject({ reason: 'start-too-low' })
  })
})

describe('a day with known people', () => {
  const day = (seed: number, scale: number, persons: (hour: number) => number) => {
    const random = seededRandom(seed)
    const timeS = Float64Array.from({ length: 10 * 12 }, (_, i) => i * 300)
    const count = Array.from(timeS, (t) => persons(t / 3600))
    let c = 480
    const levels = Array.from(timeS, (_, i) => {
      if (i > 0) {
        c = co2AfterStepPpm({
          ...room,
          airChangeRatePerHour: 1.5,
          generationLpsPerPerson: 0.005 * scale,
          persons: count[i - 1]!,
          co2Ppm: c,
          durationS: 300,
        })
      }
      return c + 10 * random.normal()
    })
    return {
      series: { timeS, co2Ppm: Float64Array.from(levels) },
      persons: count,
      generationLpsPerPerson: 0.005,
      backgroundPpm: 420,
      volumeM3: 180,
    }
  }
  const meetings = (hour: number) => (hour < 1 ? 0 : hour < 3 ? 12 : hour < 4 ? 2 : hour < 7 ? 18 : 0)
  it('recovers the rate, and with it how much people give off', () => {
    const plain = fitTransientBalance(day(1, 1, meetings))!
    expect(plain.airChangeRatePerHour).toBeCloseTo(1.5, 1)
    expect(plain.lowPerHour).toBeLessThanOrEqual(1.5)
    expect(plain.highPerHour).toBeGreaterThanOrEqual(1.5)
    const scaled = fitTransientBalance({ ...day(2, 1.2, meetings), fitGeneration: true })!
    expect(scaled.airChangeRatePerHour).toBeCloseTo(1.5, 1)
    expect(Math.abs(scaled.generationScale - 1.2)).toBeLessThan(3 * scaled.generationScaleUncertainty + 0.02)
  })
  it('an empty day says nothing of what people give off', () => {
    expect(fitTransientBalance({ ...day(3, 1, () => 0), fitGeneration: true })).toBeNull()
    expect(() => fitTransientBalance({ ...day(3, 1, meetings), persons: [1] })).toThrow(/per reading/)
  })
})

describe('headcount (T43)', () => {
  const input = {
    fromPpm: 800,
    toPpm: 860,
    durationS: 600,
    volumeM3: 180,
    airChangeRatePerHour: 2,
    backgroundPpm: 420,
    generationLpsPerPerson: 0.0052,
    uncertainty: { levelPpm: 0, backgroundPpm: 0, rate: 0, volume: 0, generation: 0 },
  }
  it('11.3781 people by the exact balance (derived)', () => {
    const exact = headcount(input)
    expect(exact.persons).toBeCloseTo(11.3781, 4)
    expect(exact.high - exact.low).toBeCloseTo(0, 9)
  })
  it('noise of 10 ppm is worth 8 people in a minute, 0.8 in ten (derived, one standard uncertainty)', () => {
    const noisy = { ...input.uncertainty, levelPpm: 10 }
    const half = (durationS: number) => {
      const { low, high } = headcount({ ...input, toPpm: 805, durationS, uncertainty: noisy })
      return (high - low) / 2 / 1.96
    }
    expect(half(600)).toBeCloseTo(0.8, 1)
    const minute = headcount({ ...input, fromPpm: 3000, toPpm: 3020, durationS: 60, uncertainty: noisy })
    expect((minute.high - minute.low) / 2 / 1.96).toBeCloseTo(8.2, 0)
  })
  it('never answers fewer than none, and refuses a stretch without length', () => {
    expect(headcount({ ...input, toPpm: 650 }).persons).toBe(0)
    expect(() => headcount({ ...input, durationS: 0 })).toThrow(/positive/)
  })
})

describe('per person (T44; GUM)', () => {
  it('8 %, 5 % and 10 % make 13.7477 %', () => {
    const flow = flowPerPersonLps(
      { airChangeRatePerHour: 2, volumeM3: 180, persons: 25 },
      { rate: 0.08, volume: 0.05, persons: 0.1 },
    )
    expect(flow.value).toBeCloseTo(4, 9)
    expect(100 * flow.relativeUncertainty).toBeCloseTo(13.7477, 4)
    expect(flow.low).toBeLessThan(4)
  })
  it('steady state: 17.4930 % about 8.27586 L/s', () => {
    const flow = steadyFlowPerPersonLps(
      { co2Ppm: 1000, backgroundPpm: 420, generationLpsPerPerson: 0.0048 },
      { co2Ppm: 50, backgroundPpm: 15, generation: 0.15 },
    )
    expect(flow.value).toBeCloseTo(8.27586, 5)
    expect(100 * flow.relativeUncertainty).toBeCloseTo(17.493, 3)
  })
})

describe('rebreathed air, between scenarios only', () => {
  it('T36: fraction 0.0152632 (Rudnick & Milton formula)', () => {
    expect(rebreathedFraction(1000, 420)).toBeCloseTo(0.0152632, 7)
    expect(rebreathedFraction(400, 420)).toBe(0)
  })
  it('mean excess during build-up 546.610 ppm (derived)', () => {
    expect(meanBuildUpExcessPpm(800, 3, 1)).toBeCloseTo(546.61, 2)
  })
  it('T37: doubling the flow at the same people and time halves it', () => {
    const scenario = { meanCo2Ppm: 1000, outdoorPpm: 420, persons: 25, hours: 2 }
    expect(relativeRebreathed({ ...scenario, meanCo2Ppm: 710 }, scenario)).toBeCloseTo(0.5, 9)
    expect(relativeRebreathed({ ...scenario, hours: 4 }, scenario)).toBeCloseTo(2, 9)
    expect(() => relativeRebreathed(scenario, { ...scenario, meanCo2Ppm: 420 })).toThrow(/no rebreathed/)
    expect(REBREATHED_CAUTION).toMatch(/never as safe or unsafe/)
  })
})

describe('energy (T42, derived)', () => {
  it('100 L/s over 2500 K·d: 7236 kWh, 120.6 W per kelvin; drying by 5 g/kg: 1500.6 W', () => {
    expect(heatingEnergyKWh({ flowLps: 100, degreeHoursKh: 60_000 })).toBeCloseTo(7236, 6)
    expect(heatingEnergyKWh({ flowLps: 100, degreeHoursKh: 60_000, heatRecovery: 0.75 })).toBeCloseTo(1809, 6)
    expect(heatingEnergyKWh({ flowLps: 100, degreeHoursKh: 18_000 })).toBeCloseTo(2170.8, 6)
    expect(sensiblePowerW(100, 1)).toBeCloseTo(120.6, 9)
    expect(latentPowerW(100, 5)).toBeCloseTo(1500.6, 6)
    expect(fanEnergyKWh({ flowLps: 100, specificFanPowerKWPerM3S: 1.8, hours: 3000 })).toBeCloseTo(540, 9)
  })
  it('cost goes from limit to limit, and no flow costs nothing', () => {
    const spare = spareAirEnergy({
      flowLps: { value: 100, low: -5, high: 130 },
      hours: 3000,
      degreeHoursKh: 18_000,
      specificFanPowerKWPerM3S: 1.8,
      heatPricePerKWh: 0.1,
      electricityPricePerKWh: 0.3,
    })
    expect(spare.value.cost).toBeCloseTo(217.08 + 162, 6)
    expect(spare.low).toEqual({ heatKWh: 0, fanKWh: 0, cost: 0 })
    expect(spare.high.heatKWh).toBeGreaterThan(spare.value.heatKWh)
    expect(() => heatingEnergyKWh({ flowLps: 1, degreeHoursKh: 1, heatRecovery: 1.2 })).toThrow(/recovery/)
  })
})

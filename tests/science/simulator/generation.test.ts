import { describe, expect, it } from 'vitest'
import {
  basalMetabolicRateMJPerDay,
  co2GenerationLps,
  pressureAtKPa,
} from '@/ingest/simulator/people/generation'

// Persily & de Jonge, Indoor Air 27 (2017), table 4 and equation 10 (methods T22 to T25); the printed cells are rounded to 1e-4.
const male25 = { sex: 'male', ageYears: 25, massKg: 84.9 } as const
const female35 = { sex: 'female', ageYears: 35, massKg: 74.8 } as const

describe('what one person breathes out', () => {
  it('has the basal rates of Schofield', () => {
    expect(basalMetabolicRateMJPerDay(male25)).toBeCloseTo(8.2447, 4)
    expect(basalMetabolicRateMJPerDay(female35)).toBeCloseTo(6.0812, 4)
    expect(basalMetabolicRateMJPerDay({ sex: 'male', ageYears: 35, massKg: 70 })).toBeCloseTo(7.013, 3)
  })

  it('rounds to the printed cells of table 4 at 273 K and 101 kPa', () => {
    const cells = [
      [male25, 1.2, 0.0048],
      [female35, 1.4, 0.0041],
      [{ sex: 'male', ageYears: 8, massKg: 31.9 }, 1.6, 0.004],
      [{ sex: 'female', ageYears: 13, massKg: 55.9 }, 1.2, 0.0035],
      [{ sex: 'male', ageYears: 72, massKg: 83.9 }, 2, 0.0064],
    ] as const
    for (const [body, met, printed] of cells) {
      expect(co2GenerationLps(body, met, 273, 101)).toBeCloseTo(printed, 4)
    }
  })

  it('grows with temperature and falls with pressure: 295.15 K and 101.325 kPa', () => {
    // methods T23
    expect(co2GenerationLps(male25, 1.2, 295.15, 101.325)).toBeCloseTo(0.00516873, 7)
  })

  it('takes the pressure of the standard atmosphere', () => {
    expect(pressureAtKPa(1500)).toBeCloseTo(84.556, 3) // methods T41
  })
})

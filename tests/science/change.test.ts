import { describe, expect, it } from 'vitest'
import { compareBeforeAfter, findRateDrift, findRateSteps, type RateDay } from '@/lib/air/change'
import { segment } from '@/lib/air/change/segment'
import { nightsBetween } from '@/lib/air/nights'
import { binomialUpperTail } from '@/lib/math/binomial'
import { seededRandom } from '@/lib/math/seeded'
import { addDays, isoWeekday } from '@/lib/time'

const start = '2025-01-06'

type World = {
  nights: number
  sd: number
  correlation: number
  weekendLn: number
  /** share of single nights at a third of the rate (a door, a switched-off fan) */
  odd?: number
  step?: { atIndex: number; ln: number }
  driftLnPerNight?: number
}

/** ln(rate) of one room's nights: AR(1) scatter, weekends of another level, odd nights, a fifth of the nights without a decay. */
function simulate(world: World, seed: number): RateDay[] {
  const random = seededRandom(seed)
  const { sd, correlation } = world
  let deviation = sd * random.normal()
  const days: RateDay[] = []
  for (let i = 0; i < world.nights; i++) {
    const night = addDays(start, i)
    deviation = correlation * deviation + sd * Math.sqrt(1 - correlation ** 2) * random.normal()
    const missing = random.uniform() < 0.2
    const odd = random.uniform() < (world.odd ?? 0.02) ? Math.log(0.33) : 0
    const weekend = isoWeekday(night) >= 6 ? world.weekendLn : 0
    const step = world.step && i >= world.step.atIndex ? world.step.ln : 0
    const drift = (world.driftLnPerNight ?? 0) * i
    if (!missing) days.push({ night, lnRate: Math.log(2) + deviation + odd + weekend + step + drift })
  }
  return days
}

describe('segmentation', () => {
  it('finds the change of methods T47 after the eighth value, means 2.08125 and 1.30 (derived)', () => {
    const values = [2.1, 2.0, 2.2, 2.05, 2.15, 2.1, 1.95, 2.1, 1.3, 1.25, 1.4, 1.2, 1.35, 1.3]
    expect(segment(values, 0.157253 ** 2, 2 * Math.log(values.length), 3)).toEqual([8])
    const sse = (part: number[]) => {
      const mean = part.reduce((a, b) => a + b) / part.length
      return part.reduce((sum, y) => sum + (y - mean) ** 2, 0)
    }
    expect(sse(values.slice(0, 8)) + sse(values.slice(8))).toBeCloseTo(0.0696875, 7)
    const days = values.map((rate, i) => ({ night: addDays('2026-03-02', i), lnRate: Math.log(rate) }))
    const [step, ...others] = findRateSteps(days)
    expect(others).toHaveLength(0)
    expect(step!.onNight).toBe('2026-03-10')
    expect(step!.ratio).toBeCloseTo(1.3 / 2.1, 1)
  })
  it('leaves a constant series whole and an unlike pair apart', () => {
    expect(segment(new Array(30).fill(1), 0.01, 6, 4)).toEqual([])
    expect(segment([...new Array(10).fill(0), ...new Array(10).fill(1)], 0.01, 6, 4)).toEqual([10])
  })
})

describe('a year without change stays quiet', () => {
  const quiet: World[] = [
    { nights: 365, sd: 0.1, correlation: 0.3, weekendLn: -0.7 },
    { nights: 365, sd: 0.15, correlation: 0.5, weekendLn: -0.7 },
    { nights: 365, sd: 0.2, correlation: 0.6, weekendLn: -1 },
    { nights: 365, sd: 0.1, correlation: 0, weekendLn: 0, odd: 0.2 },
  ]
  it.each(quiet)(
    '200 room-years, looked at once: sd $sd, correlation $correlation, weekend $weekendLn',
    (world) => {
      let alarms = 0
      for (let room = 0; room < 200; room++) alarms += findRateSteps(simulate(world, 1000 + room)).length
      expect(alarms / 200).toBeLessThanOrEqual(0.2)
    },
  )
  it.each(quiet)('looked at every night over the last 60 days: sd $sd, correlation $correlation', (world) => {
    const rooms = 12
    let alarms = 0
    for (let room = 0; room < rooms; room++) {
      const days = simulate(world, 7000 + room)
      const seen: string[] = []
      for (let end = 20; end <= days.length; end++) {
        for (const step of findRateSteps(days.slice(Math.max(0, end - 60), end))) {
          if (!seen.some((night) => Math.abs(nightsBetween(night, step.onNight)) <= 7))
            seen.push(step.onNight)
        }
      }
      alarms += seen.length
    }
    expect(alarms / rooms).toBeLessThanOrEqual(1)
  })
})

describe('a change is found, dated and sized', () => {
  const base = { nights: 84, correlation: 0.3, weekendLn: -0.4 }
  it.each([
    { sd: 0.1, ln: Math.log(0.5), leastFound: 0.98 },
    { sd: 0.15, ln: Math.log(0.5), leastFound: 0.95 },
    { sd: 0.1, ln: Math.log(0.74), leastFound: 0.85 },
    { sd: 0.1, ln: Math.log(1.5), leastFound: 0.95 },
  ])('step of $ln at sd $sd, three weeks before the end', ({ sd, ln, leastFound }) => {
    const rooms = 100
    let found = 0
    let sizeHeld = 0
    let dateHeld = 0
    const trueNight = addDays(start, 63)
    for (let room = 0; room < rooms; room++) {
      const steps = findRateSteps(simulate({ ...base, sd, step: { atIndex: 63, ln } }, 300 + room))
      const step = steps.find((one) => Math.abs(nightsBetween(one.onNight, trueNight)) <= 7)
      if (!step) continue
      found++
      if (step.ratioLow <= Math.exp(ln) && step.ratioHigh >= Math.exp(ln)) sizeHeld++
      if (step.earliestNight <= trueNight && step.latestNight >= trueNight) dateHeld++
    }
    expect(found / rooms).toBeGreaterThanOrEqual(leastFound)
    expect(sizeHeld / found).toBeGreaterThan(0.92)
    expect(dateHeld / found).toBeGreaterThan(0.92)
  })
  it('a halving is known within ten nights of its beginning', () => {
    const days = simulate({ ...base, sd: 0.1, step: { atIndex: 63, ln: Math.log(0.5) } }, 4)
    const upTo = days.filter((day) => day.night <= addDays(start, 72))
    const steps = findRateSteps(upTo)
    expect(steps).toHaveLength(1)
    expect(Math.abs(nightsBetween(addDays(start, 63), steps[0]!.onNight))).toBeLessThanOrEqual(1)
    expect(steps[0]!.earliestNight <= addDays(start, 63) && steps[0]!.latestNight >= addDays(start, 63)).toBe(
      true,
    )
  })
  it('needs a handful of days on either side', () => {
    const days = simulate({ ...base, sd: 0.1 }, 5).slice(0, 7)
    expect(findRateSteps(days)).toEqual([])
  })
})

describe('binomial tail', () => {
  it('agrees with counting and with SciPy 1.17 stats.binom.sf(k − 1, n, p)', () => {
    expect(binomialUpperTail(4, 4, 0.2)).toBeCloseTo(0.0016, 12)
    expect(binomialUpperTail(5, 7, 0.2)).toBeCloseTo(0.004672, 9)
    expect(binomialUpperTail(48, 60, 0.8)).toBeCloseTo(0.576440301445876, 8)
    expect(binomialUpperTail(0, 3, 0.5)).toBe(1)
  })
})

describe('drift', () => {
  it('finds a filter that clogs: 6 % a month', () => {
    const world = { nights: 120, sd: 0.08, correlation: 0.2, weekendLn: -0.4, driftLnPerNight: -0.002 }
    const drift = findRateDrift(simulate(world, 11))!
    expect(drift.perMonth).toBeCloseTo(-0.058, 1)
    expect(drift.ratioLow).toBeLessThanOrEqual(Math.exp(-0.24))
    expect(drift.ratioHigh).toBeGreaterThanOrEqual(Math.exp(-0.24))
    expect(drift.sentence).toContain('falling')
  })
  it('is silent in years without drift: at most 2 of 100', () => {
    let alarms = 0
    for (let room = 0; room < 100; room++) {
      const world = { nights: 120, sd: 0.12, correlation: 0.4, weekendLn: -0.4 }
      if (findRateDrift(simulate(world, 900 + room))) alarms++
    }
    expect(alarms).toBeLessThanOrEqual(2)
  })
  it('says nothing of three weeks', () => {
    expect(findRateDrift(simulate({ nights: 18, sd: 0.05, correlation: 0, weekendLn: 0 }, 1))).toBeNull()
  })
})

describe('before and after an intervention', () => {
  it('covers the true ratio about 95 times in 100', () => {
    let held = 0
    const rooms = 400
    for (let room = 0; room < rooms; room++) {
      const world = {
        nights: 30,
        sd: 0.12,
        correlation: 0,
        weekendLn: 0,
        odd: 0,
        step: { atIndex: 15, ln: 0.4 },
      }
      const result = compareBeforeAfter(simulate(world, 5000 + room), addDays(start, 15))!
      if (result.ratioLow <= Math.exp(0.4) && result.ratioHigh >= Math.exp(0.4)) held++
    }
    expect(held / rooms).toBeGreaterThan(0.925)
    expect(held / rooms).toBeLessThan(0.98)
  })
  it('leaves the day of the work out, and is silent below three days a side', () => {
    const days = [1, 1, 1, 9, 2, 2, 2].map((rate, i) => ({
      night: addDays(start, i),
      lnRate: Math.log(rate),
    }))
    const result = compareBeforeAfter(days, addDays(start, 3))!
    expect(result.ratio).toBeCloseTo(2, 9)
    expect(result.proven).toBe(true)
    expect(compareBeforeAfter(days, addDays(start, 1))).toBeNull()
  })
})

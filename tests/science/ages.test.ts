import { describe, expect, it } from 'vitest'
import { agesOfAir, TRACER_WARNING_SENTENCES, TRACER_WARNINGS, type TracerTest } from '@/lib/air/age-of-air'
import { curveMoments } from '@/lib/air/age-of-air/moments'
import { seededRandom } from '@/lib/math/seeded'
import {
  bypass,
  deadZone,
  displacement,
  IDEAL_ROOMS,
  type IdealRoom,
  mixing,
  type RecordPlan,
  sampleShare,
  tanks,
} from './support/rooms-with-ages'

const NOMINAL_S = 1800

function testOf(room: IdealRoom, plan: Partial<RecordPlan> = {}, over: Partial<TracerTest> = {}): TracerTest {
  const full: RecordPlan = {
    kind: 'decay',
    nominalS: NOMINAL_S,
    step: 0.02,
    length: 6,
    background: 420,
    rise: 1500,
    ...plan,
  }
  return {
    kind: full.kind,
    volumeM3: 90,
    background: full.background,
    exhaust: sampleShare(room.exhaust, full),
    points: Object.fromEntries(
      Object.entries(room.points).map(([name, point]) => [name, sampleShare(point.share, full)]),
    ),
    ...over,
  }
}

const off = (value: number | undefined, truth: number) => Math.abs((value ?? Number.NaN) / truth - 1)

describe.each(['decay', 'step-up'] as const)(
  'closed forms as %s (Roulet ch. 3 definitions; values derived, methods section 2.2)',
  (kind) => {
    it.each(IDEAL_ROOMS.map((room) => [room.name, room] as const))('%s', (_, room) => {
      // a dead zone empties slowly: its record must be longer for the same tail
      const length = room.name.startsWith('dead zone') ? 9 : 6
      const result = agesOfAir(testOf(room, { kind, length }))
      expect(off(result.nominalTimeS?.value, NOMINAL_S)).toBeLessThan(0.012)
      expect(off(result.roomMeanAgeS?.value, room.meanAge * NOMINAL_S)).toBeLessThan(0.012)
      const coefficient = 1 / room.meanAge
      expect(off(result.effectivenessCoefficient?.value, coefficient)).toBeLessThan(0.015)
      expect(result.airChangeEfficiencyPct!.value).toBeCloseTo(50 * result.effectivenessCoefficient!.value, 9)
      expect(result.effectivenessCoefficient!.low).toBeLessThanOrEqual(coefficient)
      expect(result.effectivenessCoefficient!.high).toBeGreaterThanOrEqual(coefficient - 1e-9)
      for (const [name, point] of Object.entries(room.points)) {
        // a front between two samples is known to half a step
        const front = room.name === 'piston' ? 0.01 / point.age : 0
        expect(off(result.points[name]!.localMeanAgeS?.value, point.age * NOMINAL_S), name).toBeLessThan(
          0.015 + front,
        )
        expect(off(result.points[name]!.localIndex?.value, 1 / point.age), name).toBeLessThan(0.02 + front)
      }
      expect(result.warnings.filter((warning) => warning !== 'short-circuit')).toEqual([])
    })
  },
)

/** Plain trapezoid rule over the samples, for comparison. */
function trapezoidMoments(timeS: readonly number[], share: readonly number[]) {
  let mu0 = 0
  let mu1 = 0
  for (let i = 1; i < timeS.length; i++) {
    const h = timeS[i]! - timeS[i - 1]!
    mu0 += (h / 2) * (share[i - 1]! + share[i]!)
    mu1 += (h / 2) * (timeS[i - 1]! * share[i - 1]! + timeS[i]! * share[i]!)
  }
  return { mu0, mu1 }
}

describe('moments (methods T32 to T34, derived)', () => {
  const sampled = (f: (t: number) => number, h: number, end: number) => {
    const timeS = Array.from({ length: Math.round(end / h) + 1 }, (_, i) => i * h)
    return { timeS, share: timeS.map(f) }
  }
  it('mixing cut at 3 nominal times without a tail flatters the efficiency (T32)', () => {
    const { timeS, share } = sampled(mixing.exhaust, 0.001, 3)
    const { mu0, mu1 } = trapezoidMoments(timeS, share)
    expect(mu0).toBeCloseTo(0.950213, 5)
    expect(mu1).toBeCloseTo(0.800852, 5)
    expect(mu0 ** 2 / (2 * mu1)).toBeCloseTo(0.563715, 5)
  })
  it('two tanks by trapezoids with a hand-fitted tail (T33)', () => {
    const { timeS, share } = sampled(tanks(2).exhaust, 0.1, 3)
    const { mu0, mu1 } = trapezoidMoments(timeS, share)
    expect(mu0).toBeCloseTo(0.990062, 5)
    expect(mu1).toBeCloseTo(0.713783, 5)
    const rate = -Math.log(share[30]! / share[25]!) / 0.5
    expect(rate).toBeCloseTo(1.691699, 5)
    expect(mu0 + share[30]! / rate).toBeCloseTo(1.000319, 5)
    expect(mu1 + share[30]! * (3 / rate + 1 / rate ** 2)).toBeCloseTo(0.750616, 5)
    // the product's own rule and tail on the same 31 samples
    const own = curveMoments({ timeS, share, noise: 0, jumps: false }, 0)
    expect(own.mu0).toBeCloseTo(1, 2)
    expect(own.mu1 / own.mu0).toBeCloseTo(0.75, 2)
  })
  it('mixing by trapezoids of a quarter nominal time (T34); the exponential rule has no such error', () => {
    const { timeS, share } = sampled(mixing.exhaust, 0.25, 40)
    const { mu0, mu1 } = trapezoidMoments(timeS, share)
    expect(mu0).toBeCloseTo(1.005203, 5)
    expect(mu1).toBeCloseTo(0.994808, 5)
    const own = curveMoments({ timeS, share, noise: 0, jumps: false }, 0)
    expect(own.mu0).toBeCloseTo(1, 3)
    expect(own.mu0 ** 2 / (2 * own.mu1)).toBeCloseTo(0.5, 3)
  })
})

describe('intervals hold the truth about 95 times in 100', () => {
  const rooms = [mixing, tanks(3), deadZone(0.7, 0.2), displacement(0.5, 0.5)]
  it.each(
    rooms.flatMap((room) => (['decay', 'step-up'] as const).map((kind) => [room.name, kind, room] as const)),
  )('%s as %s', (_, kind, room) => {
    const held = { coefficient: 0, nominal: 0, point: 0 }
    const runs = 30
    let width = 0
    for (let run = 0; run < runs; run++) {
      const random = seededRandom(run + 1)
      const noise = () => 15 * random.normal()
      const result = agesOfAir(testOf(room, { kind, noise, length: 5 }))
      const holds = (figure: { low: number; high: number } | null, truth: number) =>
        figure !== null && figure.low <= truth && figure.high >= truth ? 1 : 0
      const [name, point] = Object.entries(room.points)[0]!
      held.coefficient += holds(result.effectivenessCoefficient, 1 / room.meanAge)
      held.nominal += holds(result.nominalTimeS, NOMINAL_S)
      held.point += holds(result.points[name]!.localMeanAgeS, point.age * NOMINAL_S)
      width +=
        Math.log(result.effectivenessCoefficient!.high / result.effectivenessCoefficient!.low) / 2 / runs
    }
    for (const count of Object.values(held)) expect(count / runs).toBeGreaterThanOrEqual(0.9)
    expect(width).toBeLessThan(room.name.startsWith('dead zone') ? 0.26 : 0.15)
  })
})

describe('warnings', () => {
  it('a short circuit is normalised by the level before the step, and said (trap of methods section 2.2)', () => {
    for (const kind of ['decay', 'step-up'] as const) {
      const result = agesOfAir(testOf(bypass(0.2), { kind }))
      expect(result.warnings).toContain('short-circuit')
      expect(off(result.effectivenessCoefficient?.value, 0.8)).toBeLessThan(0.01)
    }
    const hidden = testOf(bypass(0.2), { before: 0 })
    const blind = agesOfAir({ ...hidden, exhaust: hidden.exhaust!.filter(([t]) => t > 0), points: {} })
    expect(blind.warnings).toContain('initial-after-step')
    const given = agesOfAir({ ...hidden, initial: 1920, exhaust: hidden.exhaust!.filter(([t]) => t > 0) })
    expect(off(given.effectivenessCoefficient?.value, 0.8)).toBeLessThan(0.01)
    expect(given.warnings).not.toContain('initial-after-step')
  })
  it('a short record says how much lies in its tail', () => {
    const short = agesOfAir(testOf(mixing, { length: 2 }))
    expect(short.warnings).toContain('tail-share')
    // missing share of μ1 at x: (1 + x) e^(−x) (derived)
    expect(short.tailShare).toBeCloseTo(3 * Math.exp(-2), 2)
    const long = agesOfAir(testOf(mixing, { length: 4 }))
    expect(long.warnings).toEqual([])
    expect(long.tailShare).toBeCloseTo(5 * Math.exp(-4), 2)
  })
  it('a start that is not uniform', () => {
    const test = testOf(mixing)
    const lifted = test.points.P1!.map(([t, c]) => [t, 420 + (c - 420) * 1.3] as const)
    expect(agesOfAir({ ...test, points: { P1: lifted } }).warnings).toContain('non-uniform-start')
  })
  it('tracer that comes back', () => {
    const floor = (t: number) => 0.12 + 0.88 * Math.exp(-t)
    const result = agesOfAir(testOf({ ...mixing, exhaust: floor, points: {} }, { length: 8 }))
    expect(result.warnings).toContain('recirculation')
    const slow = agesOfAir(testOf(deadZone(0.8, 0.1), { length: 8 }))
    expect(slow.warnings).not.toContain('recirculation')
  })
  it('a supply that does not fit the exhaust', () => {
    // 90 m³ in 1800 s is 50 L/s
    expect(agesOfAir(testOf(mixing, {}, { supplyLps: 50 })).warnings).toEqual([])
    expect(agesOfAir(testOf(mixing, {}, { supplyLps: 80 })).warnings).toContain('supply-mismatch')
  })
  it('a wall sensor is only local', () => {
    const local = agesOfAir(testOf(deadZone(0.7, 0.2), {}, { exhaust: null }))
    expect(local.warnings).toContain('local-only')
    expect(local.nominalTimeS).toBeNull()
    expect(local.roomMeanAgeS).toBeNull()
    expect(local.effectivenessCoefficient).toBeNull()
    expect(off(local.points.dead!.localMeanAgeS?.value, 2.5 * NOMINAL_S)).toBeLessThan(0.01)
    expect(local.points.dead!.localIndex).toBeNull()
    const known = agesOfAir(testOf(deadZone(0.7, 0.2), {}, { exhaust: null, supplyLps: 50 }))
    expect(off(known.points.dead!.localIndex?.value, 0.4)).toBeLessThan(0.01)
  })
  it('a record that never falls gives no age', () => {
    const flat = agesOfAir(testOf({ ...mixing, exhaust: () => 0.9, points: {} }))
    expect(flat.nominalTimeS).toBeNull()
    expect(flat.warnings).toContain('no-decaying-tail')
  })
  it('each has its sentence', () => {
    for (const warning of TRACER_WARNINGS) expect(TRACER_WARNING_SENTENCES[warning]).toMatch(/^[A-Z].*\.$/)
  })
})

describe('invariance', () => {
  it('does not care for the unit of concentration, the order of samples, or duplicates', () => {
    const plain = agesOfAir(testOf(tanks(3)))
    const test = testOf(tanks(3), { background: 0.42, rise: 1.5 })
    const mixedUp = [...test.exhaust!].reverse()
    const scaled = agesOfAir({ ...test, exhaust: [...mixedUp, ...mixedUp.slice(3, 40)] })
    expect(scaled.effectivenessCoefficient!.value).toBeCloseTo(plain.effectivenessCoefficient!.value, 6)
    expect(scaled.nominalTimeS!.value).toBeCloseTo(plain.nominalTimeS!.value, 4)
  })
  it('refuses what has no answer', () => {
    expect(() => agesOfAir(testOf(mixing, {}, { volumeM3: 0 }))).toThrow(/volume/)
    expect(() => agesOfAir(testOf(mixing, { rise: 0 }, { initial: 420 }))).toThrow(/equals the background/)
    expect(() => agesOfAir({ ...testOf(mixing), exhaust: null, points: {} })).toThrow(/record/)
  })
})

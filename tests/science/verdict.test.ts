import { describe, expect, it } from 'vitest'
import { judgeRoom, type VerdictInput } from '@/lib/air/verdict'
import type { RoomEstimate } from '@/lib/air/weeks'
import { addDays } from '@/lib/time'
import { atLeast, atMost, estimate } from './support/estimates'

const through = '2026-03-29'
const night = (daysBack: number) => addDays(through, -daysBack)
const weekdays = (count: number, ratePerHour: number, over: Partial<RoomEstimate> = {}) =>
  Array.from({ length: count }, (_, i) =>
    estimate(night(i), ratePerHour * (1 + 0.02 * Math.sin(i * 2)), over),
  )

function judge(over: Partial<VerdictInput>) {
  return judgeRoom({
    throughNight: through,
    estimates: weekdays(10, 3),
    lastChangeNight: null,
    volumeM3: 120,
    basisFlowLps: 80,
    airSystem: 'outdoor',
    ...over,
  })
}

describe('verdict by the interval of the outdoor flow', () => {
  it('meets basis when the lower end does (3/h of 120 m³ is 100 L/s)', () => {
    const room = judge({ designHeadcount: 10 })
    expect(room.verdict).toBe('meets basis')
    expect(room.reason.code).toBe('interval-above-basis')
    expect(room.flowLps!.value).toBeCloseTo(100, 0)
    expect(room.flowLpsPerPerson!.value).toBeCloseTo(10, 1)
    expect(room.flowLps!.low!).toBeGreaterThanOrEqual(80)
    expect(room.mode).toBe('supply on')
    expect(room.isDilutionRate).toBe(false)
  })
  it('is short of basis when the upper end is below it', () => {
    expect(judge({ basisFlowLps: 130 }).verdict).toBe('short of basis')
  })
  it('is not proven in between, and the volume alone can make it so', () => {
    expect(judge({ basisFlowLps: 95 })).toMatchObject({
      verdict: 'not proven',
      reason: { code: 'interval-spans-basis' },
    })
    expect(judge({ basisFlowLps: 95, volumeRelativeUncertainty: 0.005 }).verdict).toBe('meets basis')
  })
  it('holds at least the 5 % of the volume in the flow, not in the rate', () => {
    const room = judge({})
    const relative = (low: number, high: number) => Math.log(high / low) / 2
    expect(relative(room.flowLps!.low!, room.flowLps!.high!)).toBeGreaterThan(1.95 * 0.05)
    expect(relative(room.rate!.lowPerHour!, room.rate!.highPerHour!)).toBeLessThan(0.05)
  })
})

describe('what a verdict may speak from', () => {
  it('needs five days, not five decays', () => {
    const oneDay = Array.from({ length: 9 }, () => estimate(night(0), 3))
    expect(judge({ estimates: oneDay })).toMatchObject({
      verdict: 'not proven',
      reason: { code: 'too-few-days' },
      days: 1,
      decays: 9,
    })
    expect(judge({ estimates: weekdays(4, 3) }).verdict).toBe('not proven')
    expect(judge({ estimates: weekdays(5, 4) }).verdict).toBe('meets basis')
  })
  it('takes 28 local days and nothing before the last change', () => {
    const old = Array.from({ length: 20 }, (_, i) => estimate(night(28 + i), 0.5))
    expect(judge({ estimates: [...weekdays(10, 3), ...old] }).days).toBe(10)
    const changed = [...weekdays(6, 1), ...Array.from({ length: 15 }, (_, i) => estimate(night(8 + i), 3))]
    const since = judge({ estimates: changed, lastChangeNight: night(7) })
    expect(since.verdict).toBe('short of basis')
    expect(since.sinceNight).toBe(night(7))
    expect(since.days).toBe(6)
    expect(judge({ lastChangeNight: night(60) }).sinceNight).toBe(night(27))
  })
  it('never calls a room short because of decays with the supply off or of unknown mode', () => {
    const off = weekdays(10, 0.1, { mode: 'supply off' })
    expect(judge({ estimates: off })).toMatchObject({
      verdict: 'not proven',
      reason: { code: 'only-supply-off' },
      rate: null,
    })
    const unknown = weekdays(10, 0.1, { mode: 'unknown', modeFrom: null })
    expect(judge({ estimates: [...off, ...unknown] }).reason.code).toBe('mode-unknown')
    expect(judge({ estimates: weekdays(9, 1, { mode: 'supply reduced' }) }).reason.code).toBe(
      'only-supply-reduced',
    )
    expect(judge({ estimates: [...off, ...weekdays(8, 3)] }).verdict).toBe('meets basis')
  })
  it('says when nothing was there, nothing could be used, or no basis is set', () => {
    expect(judge({ estimates: [] }).reason.code).toBe('no-decays')
    const refused = weekdays(8, 3, { quality: 'refused', airChangeRatePerHour: null })
    expect(judge({ estimates: refused }).reason.code).toBe('all-refused')
    expect(judge({ basisFlowLps: null })).toMatchObject({
      verdict: 'not proven',
      reason: { code: 'no-basis' },
    })
  })
})

describe('what air it is', () => {
  it.each(['recirculating', 'unknown'] as const)(
    '%s: a dilution rate has no flow and is never proven',
    (airSystem) => {
      const room = judge({ airSystem, basisFlowLps: 1 })
      expect(room).toMatchObject({
        verdict: 'not proven',
        isDilutionRate: true,
        flowLps: null,
        flowLpsPerPerson: null,
        reason: { code: 'recirculation-possible' },
      })
      expect(room.rate!.ratePerHour).toBeCloseTo(3, 1)
    },
  )
  it('a known outdoor fraction makes a flow, with its uncertainty', () => {
    const given = {
      airSystem: 'recirculating' as const,
      outdoorFraction: { value: 0.25, standardUncertainty: 0.05 },
    }
    const room = judge({ ...given, basisFlowLps: 60 })
    expect(room.flowLps!.value).toBeCloseTo(25, 0)
    expect(room.flowLps!.high! / room.flowLps!.low!).toBeGreaterThan(Math.exp(2 * 1.96 * 0.2))
    expect(room.verdict).toBe('short of basis')
  })
  it('a room that takes air from its neighbour is held by its outdoor range', () => {
    const coupled = weekdays(10, 6, {
      quality: 'doubtful',
      reasons: ['neighbour-coupled'],
      outdoorRateLowPerHour: 1.5,
      outdoorRateHighPerHour: 3.5,
    })
    expect(judge({ estimates: coupled }).reason.code).toBe('air-from-neighbour')
    expect(judge({ estimates: coupled, basisFlowLps: 150 }).verdict).toBe('short of basis')
    expect(judge({ estimates: coupled, basisFlowLps: 40 }).verdict).toBe('meets basis')
  })
  it('naturally ventilated rooms are held in their own mode', () => {
    const room = judge({ estimates: weekdays(8, 3, { mode: 'natural' }), airSystem: 'natural' })
    expect(room).toMatchObject({ verdict: 'meets basis', mode: 'natural' })
  })
})

describe('rooms too fast or too slow to measure', () => {
  it('a lower bound can meet a basis, an upper bound can fall short of it', () => {
    const fast = Array.from({ length: 8 }, (_, i) => atLeast(night(i), 6))
    expect(judge({ estimates: fast })).toMatchObject({
      verdict: 'meets basis',
      flowLps: { value: null, high: null },
    })
    expect(judge({ estimates: fast, basisFlowLps: 500 }).reason.code).toBe('only-bounds')
    const slow = Array.from({ length: 8 }, (_, i) => atMost(night(i), 0.2))
    expect(judge({ estimates: slow })).toMatchObject({
      verdict: 'short of basis',
      flowLps: { value: null, low: null },
    })
  })
})

it('refuses a volume that is none', () => {
  expect(() => judge({ volumeM3: 0 })).toThrow(/volume/)
})

it('every sentence is one sentence, without an exponent', () => {
  const rooms = [
    judge({}),
    judge({ volumeM3: 12000, basisFlowLps: 9000 }),
    judge({ basisFlowLps: 130 }),
    judge({ basisFlowLps: 95 }),
    judge({ estimates: [] }),
  ]
  for (const { reason } of rooms) {
    expect(reason.sentence).toMatch(/^[A-Z].*\.$/)
    expect(reason.sentence).not.toMatch(/\de[+-]?\d|NaN|null|undefined/)
  }
})

import { describe, expect, it } from 'vitest'
import { purgeTimeS, timeToLevelS } from '@/lib/air/purge'
import { CHECK_YOUR_COPY, cautionOf, SOURCES, type SourceKey } from '@/lib/air/sources'
import { equilibriumCo2Ppm, OCCUPANCY_CAUTION, personsSupported, timeToLimitS } from '@/lib/air/supports'
import {
  CO2_LIMITS,
  DEFAULT_CO2_LIMIT,
  EZ_ROWS,
  FLOW_PRESETS,
  limitCaution,
  limitInWords,
  limitLevelPpm,
  personsForFlow,
  requiredFlowLps,
} from '@/lib/air/targets'

const room = (designHeadcount: number, floorAreaM2: number) => ({ designHeadcount, floorAreaM2 })

describe('required outdoor flow', () => {
  it('ASHRAE 62.1 classroom of 25 in 65 m² (methods T38; rates seen in 62.1-2016)', () => {
    const basis = { kind: 'preset' as const, presetKey: 'ashrae621-classroom-9' }
    expect(requiredFlowLps(basis, room(25, 65)).flowLps).toBeCloseTo(164, 9)
    expect(requiredFlowLps({ ...basis, ez: 0.8 }, room(25, 65)).flowLps).toBeCloseTo(205, 9)
  })
  it('ASHRAE 62.1 office and conference room (worked examples, methods section 4.2)', () => {
    expect(
      requiredFlowLps({ kind: 'preset', presetKey: 'ashrae621-office' }, room(5, 100)).flowLps,
    ).toBeCloseTo(42.5, 9)
    expect(
      requiredFlowLps({ kind: 'preset', presetKey: 'ashrae621-conference' }, room(10, 20)).flowLps,
    ).toBeCloseTo(31, 9)
  })
  it('EN 16798-1 category II, low polluting: 14.0 L/s a person at 10 m², 8.4 at 2 m² (methods T39, from memory)', () => {
    const basis = { kind: 'preset' as const, presetKey: 'en16798-ii-low' }
    expect(requiredFlowLps(basis, room(1, 10)).flowLps).toBeCloseTo(14, 9)
    expect(requiredFlowLps(basis, room(25, 50)).flowLps! / 25).toBeCloseTo(8.4, 9)
  })
  it('EN 16798-1 totals per person for 10 m² each, and the floor of 4 L/s per person (from memory)', () => {
    const total = (key: string, area: number) =>
      requiredFlowLps({ kind: 'preset', presetKey: key }, room(1, area)).flowLps
    expect(total('en16798-i-low', 10)).toBeCloseTo(20, 9)
    expect(total('en16798-iii-low', 10)).toBeCloseTo(8, 9)
    expect(total('en16798-iv-low', 10)).toBeCloseTo(5.5, 9)
    expect(total('en16798-iv-low', 1)).toBeCloseTo(4, 9)
  })
  it('design flow, a free flow per person, and the larger of two', () => {
    expect(requiredFlowLps({ kind: 'design-flow' }, { ...room(10, 20), designFlowLps: 90 }).flowLps).toBe(90)
    const free = { kind: 'per-person' as const, flowLpsPerPerson: 8, flowLpsPerM2: 0.5 }
    expect(requiredFlowLps(free, room(10, 20)).flowLps).toBeCloseTo(90, 9)
    const larger = { kind: 'preset' as const, presetKey: 'uk-adf-office' }
    expect(requiredFlowLps(larger, room(2, 50)).flowLps).toBe(50)
    expect(requiredFlowLps(larger, room(8, 50)).flowLps).toBe(80)
  })
  it('says what is missing, and refuses what cannot be', () => {
    const preset = { kind: 'preset' as const, presetKey: 'ashrae621-office' }
    expect(requiredFlowLps(preset, { designHeadcount: null, floorAreaM2: 10 })).toMatchObject({
      missing: 'design headcount',
    })
    expect(requiredFlowLps(preset, { designHeadcount: 4, floorAreaM2: null })).toMatchObject({
      missing: 'floor area',
    })
    expect(requiredFlowLps({ kind: 'design-flow' }, room(4, 10))).toMatchObject({
      flowLps: null,
      missing: 'design flow',
    })
    expect(() => requiredFlowLps({ kind: 'preset', presetKey: 'nothing' }, room(4, 10))).toThrow(/nothing/)
    expect(() => requiredFlowLps({ kind: 'per-person', flowLpsPerPerson: 0 }, room(4, 10))).toThrow(
      /positive/,
    )
    expect(() => requiredFlowLps({ ...preset, ez: 0 }, room(4, 10))).toThrow(/Ez/)
  })
})

describe('where the numbers come from', () => {
  it('every number from memory, or quoted second-hand, carries the sentence', () => {
    for (const key of Object.keys(SOURCES) as SourceKey[]) {
      const source = SOURCES[key]
      if (source.status === 'from memory') expect(cautionOf(key)).toBe(CHECK_YOUR_COPY)
      expect(source.edition.length).toBeGreaterThan(3)
    }
    for (const preset of FLOW_PRESETS) {
      const flow = requiredFlowLps({ kind: 'preset', presetKey: preset.key }, room(10, 30))
      expect(flow).toMatchObject({
        edition: SOURCES[preset.source].edition,
        caution: cautionOf(preset.source),
      })
    }
    expect(cautionOf('en16798Flows')).toBe(CHECK_YOUR_COPY)
    expect(cautionOf('ashrae621Rates')).toBeNull()
    for (const row of EZ_ROWS) expect(cautionOf(row.source)).toBe(CHECK_YOUR_COPY)
  })
  it('keys are unique, and nothing uncertain or unverified is offered', () => {
    const keys = [...FLOW_PRESETS, ...EZ_ROWS, ...CO2_LIMITS].map((preset) => preset.key)
    expect(new Set(keys).size).toBe(keys.length)
    const names = FLOW_PRESETS.map((preset) => preset.name).join(' ')
    expect(names).not.toMatch(/241|break|gym/i)
    expect(CO2_LIMITS.some((limit) => /IV|62\.1/.test(limit.origin))).toBe(false)
  })
})

describe('limits', () => {
  it('default is 800 ppm above outdoor, EN 16798-1 category II', () => {
    expect(DEFAULT_CO2_LIMIT).toMatchObject({
      kind: 'above outdoor',
      limitPpm: 800,
      averaging: '15 min mean',
    })
    expect(limitLevelPpm(DEFAULT_CO2_LIMIT, 430)).toBe(1230)
    expect(limitInWords(DEFAULT_CO2_LIMIT)).toBe(
      '800 ppm above outdoor, 15 min mean (EN 16798-1:2019 category II); an indicator of ventilation, not a health limit',
    )
    expect(limitCaution(DEFAULT_CO2_LIMIT)).toBe(CHECK_YOUR_COPY)
  })
  it('550, 800 and 1350 follow from 20 L/h at 10, 7 and 4 L/s (methods T21, rounded by the standard)', () => {
    for (const [key, flow] of [
      ['en16798-i', 10],
      ['en16798-ii', 7],
      ['en16798-iii', 4],
    ] as const) {
      const limit = CO2_LIMITS.find((one) => one.key === key)!
      const exact = equilibriumCo2Ppm({
        backgroundPpm: 0,
        persons: 1,
        generationLpsPerPerson: 20 / 3600,
        flowLps: flow,
      })
      expect(Math.abs(exact / limit.limitPpm - 1)).toBeLessThan(0.03)
    }
  })
})

describe('people the ventilation supports', () => {
  const basis = { kind: 'per-person' as const, flowLpsPerPerson: 7, flowLpsPerM2: 0.7 }
  it('rounds down from the lower end and never exceeds the permitted occupancy', () => {
    const input = { flowLowLps: 104.9, basis, floorAreaM2: 50, permittedOccupancy: null }
    expect(personsSupported(input)).toEqual({
      persons: 9,
      limitedBy: 'ventilation',
      caution: OCCUPANCY_CAUTION,
    })
    expect(personsSupported({ ...input, flowLowLps: 105 })).toMatchObject({ persons: 10 })
    expect(personsSupported({ ...input, permittedOccupancy: 6 })).toMatchObject({
      persons: 6,
      limitedBy: 'permitted occupancy',
      caution: OCCUPANCY_CAUTION,
    })
    expect(personsSupported({ ...input, flowLowLps: 20 })).toMatchObject({ persons: 0 })
  })
  it('has the words of the caution', () => {
    expect(OCCUPANCY_CAUTION).toBe(
      'For ventilation only. Fire-safety and licensed occupancy limits may be lower and take precedence.',
    )
  })
  it('gives no number for a dilution rate, without a basis, or from a design flow', () => {
    const input = { flowLowLps: null, basis, floorAreaM2: 50, permittedOccupancy: 10 }
    expect(personsSupported(input)).toEqual({ persons: null, missing: 'outdoor flow' })
    expect(personsSupported({ ...input, flowLowLps: 80, basis: null })).toEqual({
      persons: null,
      missing: 'basis',
    })
    expect(personsSupported({ ...input, flowLowLps: 80, basis: { kind: 'design-flow' } }).persons).toBeNull()
  })
  it('Ez counts, and the EN floor of 4 L/s per person', () => {
    const classroom = { kind: 'preset' as const, presetKey: 'ashrae621-classroom-9', ez: 0.8 }
    expect(personsForFlow(classroom, 205, 65)).toBe(25)
    expect(personsForFlow({ kind: 'preset', presetKey: 'en16798-iv-low' }, 40, 1)).toBe(10)
  })
})

describe('times', () => {
  it('purge (methods T35; 46 min at 6/h is in the CDC clearance table, from memory)', () => {
    expect(purgeTimeS(2, 0.95) / 60).toBeCloseTo(89.872, 3)
    expect(purgeTimeS(6, 0.99) / 60).toBeCloseTo(46.052, 3)
    expect(() => purgeTimeS(0, 0.5)).toThrow(RangeError)
    expect(() => purgeTimeS(1, 1)).toThrow(RangeError)
  })
  it('the room shows its background only after hours (methods T54: 800 to 10 ppm)', () => {
    const from = { co2Ppm: 1220, targetPpm: 430, backgroundPpm: 420 }
    expect(timeToLevelS({ ...from, airChangeRatePerHour: 0.5 })! / 3600).toBeCloseTo(8.7641, 4)
    expect(timeToLevelS({ ...from, airChangeRatePerHour: 0.1 })! / 3600).toBeCloseTo(43.8203, 4)
    expect(timeToLevelS({ ...from, targetPpm: 420, airChangeRatePerHour: 1 })).toBeNull()
    expect(timeToLevelS({ ...from, co2Ppm: 425, airChangeRatePerHour: 1 })).toBe(0)
  })
  it('equilibrium and time to a limit (methods T18: 1220 ppm; 1041.496 after half an hour)', () => {
    const equilibriumPpm = equilibriumCo2Ppm({
      backgroundPpm: 420,
      persons: 25,
      generationLpsPerPerson: 0.0048,
      flowLps: 150,
    })
    expect(equilibriumPpm).toBeCloseTo(1220, 9)
    const input = { co2Ppm: 420, equilibriumPpm, airChangeRatePerHour: 3 }
    expect(timeToLimitS({ ...input, limitPpm: 1041.496 })! / 1800).toBeCloseTo(1, 5)
    expect(timeToLimitS({ ...input, limitPpm: 1220 })).toBeNull()
    expect(timeToLimitS({ ...input, limitPpm: 400 })).toBe(0)
  })
})

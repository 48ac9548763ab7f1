import { describe, expect, test } from 'vitest'
import { panned, zoomed } from '@/components/charts/view'
import { dayAndClock, longDate, zonedStamp } from '@/lib/format/clock'
import { counted, countWord, duration, listed, spaced } from '@/lib/format/counts'
import { rangeOf } from '@/lib/format/room-range'
import { supplySpans } from '@/lib/format/supply-spans'
import { clearMinutes, intervalWords, rateText, tenantVerdictWords, verdictWords } from '@/lib/format/verdict'
import { localToEpochS } from '@/lib/time'
import type { RoomVerdictRow } from '@/lib/wire/rooms'

const verdict: RoomVerdictRow = {
  mode: 'supply on',
  modeFrom: 'status',
  throughNight: '2026-11-16',
  verdict: 'short of basis',
  reason: 'interval-below-basis',
  sentence: 'Over 14 days the room got less.',
  rate: 2.41,
  rateLow: 2.21,
  rateHigh: 2.63,
  days: 14,
  decays: 19,
  since: '2026-10-20',
  isDilutionRate: false,
  flowLps: 64.3,
  flowLowLps: 57.1,
  flowHighLps: 71.4,
  basisName: 'EN 16798-1 category II',
  basisFlowLps: 106,
  designHeadcount: 12,
  supportsPersons: 5,
  volumeM3: 96,
}

describe('verdicts in words', () => {
  test('for an engineer: rate, interval, how many decays, flow against basis', () => {
    expect(verdictWords('Heddle', verdict)).toEqual({
      sentence:
        'With supply on, Heddle gets 2.4 air changes an hour (2.2 to 2.6, from 19 decays on 14 days). That is 64 L/s of outdoor air (57 to 71); its basis asks for 106.',
      verdict: 'Short of basis.',
    })
  })

  test('a dilution rate gets no flow, and says why nothing is proven', () => {
    const words = verdictWords('Warp Office', {
      ...verdict,
      verdict: 'not proven',
      reason: 'recirculation-possible',
      sentence: 'The air may be partly recirculated.',
      isDilutionRate: true,
      flowLps: null,
      flowLowLps: null,
      flowHighLps: null,
    })
    expect(words.sentence).toContain('is diluted 2.4 times an hour')
    expect(words.sentence).toContain('The air may be partly recirculated.')
    expect(words.sentence).not.toContain('L/s')
  })

  test('only a bound is said as a bound; nothing known is said as that', () => {
    const bound = {
      ...verdict,
      verdict: 'not proven' as const,
      rate: null,
      rateHigh: null,
      reason: 'only-bounds',
      sentence: 'Only a bound is known.',
    }
    expect(verdictWords('Heddle', bound).sentence).toBe(
      'With supply on, Heddle gets at least 2.2 air changes an hour (from 19 decays on 14 days). Only a bound is known.',
    )
    expect(verdictWords('Heddle', null).verdict).toBe('')
  })

  test.each(['meets basis', 'short of basis', 'not proven'] as const)(
    'a tenant never meets an air change: %s',
    (each) => {
      const words = tenantVerdictWords('Heddle', { ...verdict, verdict: each, reason: 'too-few-days' })
      expect(words.sentence).not.toMatch(/air.change|decay|ACH|1\/h|L\/s/i)
      expect(words.sentence).toContain('Heddle')
    },
  )
})

test('minutes to clear follow ln(E0 / E1) / A (ASTM E741), and nothing is said of what cannot be', () => {
  expect(clearMinutes(1238, 638, 438, 2.4)).toBeCloseTo((60 * Math.log(4)) / 2.4, 9)
  expect(clearMinutes(600, 638, 438, 2.4)).toBeNull()
  expect(clearMinutes(1238, 438, 438, 2.4)).toBeNull()
  expect(clearMinutes(1238, 638, 438, 0)).toBeNull()
})

test('figures, counts and durations as people read them', () => {
  expect([0.324, 2.41, 13.7].map(rateText)).toEqual(['0.32', '2.4', '14'])
  expect(intervalWords(null, 2.6, rateText)).toBe('at most 2.6')
  expect([1307, 18_240, -5, 1_234_567].map(spaced)).toEqual([
    '1307',
    '18\u2009240',
    '-5',
    '1\u2009234\u2009567',
  ])
  expect([countWord(0), countWord(12), countWord(13), counted(1, 'room'), counted(4, 'room')]).toEqual([
    'no',
    'twelve',
    '13',
    'one room',
    'four rooms',
  ])
  expect([8, 60, 97 * 60, 3 * 3600 + 1200, 27 * 3600, 3 * 86_400].map(duration)).toEqual([
    '8 s',
    '1 min',
    '97 min',
    '3 h 20 min',
    '27 h',
    '3 days',
  ])
  expect(listed(['a', 'b', 'c'])).toBe('a, b and c')
})

test('clock and dates in the building’s zone, the zone named', () => {
  const winter = localToEpochS('2026-11-17', '14:42', 'Europe/London')
  expect(zonedStamp(winter, 'Europe/London')).toEqual({ day: 'Tue 17 Nov', clock: '14:42', zone: 'GMT' })
  expect(zonedStamp(localToEpochS('2026-06-17', '14:42', 'Europe/London'), 'Europe/London').zone).toBe('BST')
  expect(dayAndClock(winter - 3600, winter, 'Europe/London')).toBe('13:42')
  expect(dayAndClock(winter - 86_400, winter, 'Europe/London')).toBe('yesterday 14:42')
  expect(dayAndClock(winter - 3 * 86_400, winter, 'Europe/London')).toBe('Sat 14 Nov 14:42')
  expect([longDate('2026-09-28', '2026'), longDate('2025-09-28', '2026')]).toEqual([
    '28 September',
    '28 September 2025',
  ])
})

describe('supply hours', () => {
  const zone = 'Europe/London'
  const at = (date: string, clock: string) => localToEpochS(date, clock, zone)
  const hours = [{ days: [1, 2, 3, 4, 5], from: '07:00', to: '19:00' }]

  test('by status where there is one: reduced counts as on, and the last state holds', () => {
    const states = [
      { atS: at('2026-11-16', '06:00'), state: 'on' as const },
      { atS: at('2026-11-16', '18:00'), state: 'off' as const },
      { atS: at('2026-11-17', '06:30'), state: 'reduced' as const },
    ]
    const spans = supplySpans(
      { states, hours, closures: [] },
      at('2026-11-16', '12:00'),
      at('2026-11-17', '12:00'),
      zone,
    )
    expect(spans).toEqual([
      { fromS: at('2026-11-16', '12:00'), toS: at('2026-11-16', '18:00') },
      { fromS: at('2026-11-17', '06:30'), toS: at('2026-11-17', '12:00') },
    ])
  })

  test('else by the weekly hours, without closed days', () => {
    const closures = [{ fromDate: '2026-11-17', toDate: '2026-11-17' }]
    const spans = supplySpans(
      { states: [], hours, closures },
      at('2026-11-14', '00:00'),
      at('2026-11-18', '23:00'),
      zone,
    )
    expect(spans.map(({ fromS }) => zonedStamp(fromS, zone).day)).toEqual(['Mon 16 Nov', 'Wed 18 Nov'])
  })
})

test('a view stays inside the whole, however it is zoomed or moved', () => {
  const whole = [0, 86_400] as const
  expect(zoomed([0, 86_400], 0.5, whole)).toEqual([21_600, 64_800])
  expect(zoomed([80_000, 86_400], 4, whole)).toEqual([60_800, 86_400])
  expect(zoomed([100, 800], 0.1, whole)[1] - zoomed([100, 800], 0.1, whole)[0]).toBe(600)
  expect(panned([0, 1000], -0.5, whole)).toEqual([0, 1000])
  expect(panned([85_400, 86_400], 0.5, whole)).toEqual([85_400, 86_400])
  expect(zoomed([1000, 2000], 1000, whole)).toEqual(whole)
})

test('the span of a chart is one of three, seven days when none is named', () => {
  expect([rangeOf('24h').seconds, rangeOf(undefined).key, rangeOf('x').key, rangeOf(['4w']).key]).toEqual([
    86_400,
    '7d',
    '7d',
    '4w',
  ])
})

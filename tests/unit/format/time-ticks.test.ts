import { describe, expect, test } from 'vitest'
import { logTicks, timeTicks, valueTicks } from '@/lib/format/time-ticks'
import { localToEpochS } from '@/lib/time'

const at = (date: string, clock: string, zone = 'Europe/London') => localToEpochS(date, clock, zone)
const labels = (ticks: { label: string }[]) => ticks.map(({ label }) => label)

describe('ticks of a time axis', () => {
  test('a day has hours of the building, midnight strong', () => {
    const ticks = timeTicks(at('2026-11-16', '14:40'), at('2026-11-17', '14:40'), 'Europe/London', 9)
    expect(labels(ticks)).toEqual(['15:00', '18:00', '21:00', '00:00', '03:00', '06:00', '09:00', '12:00'])
    expect(ticks.filter(({ strong }) => strong).map(({ label }) => label)).toEqual(['00:00'])
  })

  test('a week has local midnights', () => {
    const ticks = timeTicks(at('2026-11-11', '09:00'), at('2026-11-18', '09:00'), 'Europe/London', 8)
    expect(labels(ticks)).toEqual(['Thu 12', 'Fri 13', 'Sat 14', 'Sun 15', 'Mon 16', 'Tue 17', 'Wed 18'])
  })

  test.each([
    ['2026-03-29', 'spring, 23 h'],
    ['2026-10-25', 'autumn, 25 h'],
  ])('%s (%s) keeps its ticks on the local hour and names none twice', (date) => {
    const ticks = timeTicks(at(date, '00:00'), at(date, '23:00'), 'Europe/London', 12)
    expect(new Set(labels(ticks)).size).toBe(ticks.length)
    for (const { atS } of ticks) expect(atS % 3600).toBe(0)
    expect(labels(ticks)).toContain('06:00')
    expect(labels(ticks)).toContain('12:00')
  })

  test('a zone of half an hour has its own midnight', () => {
    const [first] = timeTicks(
      at('2026-11-16', '00:00', 'Asia/Kolkata'),
      at('2026-11-18', '12:00', 'Asia/Kolkata'),
      'Asia/Kolkata',
      4,
    )
    expect(first?.atS).toBe(Date.UTC(2026, 10, 15, 18, 30) / 1000)
  })

  test('never more than were asked for, and none for an empty span', () => {
    for (const days of [0.1, 1, 7, 28, 200, 900]) {
      const to = at('2026-11-18', '09:00')
      expect(timeTicks(to - days * 86_400, to, 'Europe/London', 6).length).toBeLessThanOrEqual(7)
    }
    expect(timeTicks(10, 10, 'Europe/London', 5)).toEqual([])
  })
})

test('value ticks are round and cover the range', () => {
  expect(valueTicks(400, 1600, 7)).toEqual([400, 600, 800, 1000, 1200, 1400, 1600])
  expect(valueTicks(0, 5, 6)).toEqual([0, 1, 2, 3, 4, 5])
  expect(valueTicks(-30, 30, 4)).toEqual([-20, 0, 20])
})

test('log ticks are 1, 2 and 5 of each power of ten', () => {
  expect(logTicks(14, 1300)).toEqual([20, 50, 100, 200, 500, 1000])
})

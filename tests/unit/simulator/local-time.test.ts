import { describe, expect, it } from 'vitest'
import { dateOf, dayOf, LocalTime, minuteOf, weekdayOf } from '@/ingest/simulator/local-time'

const london = new LocalTime('Europe/London')
const at = (iso: string) => Date.parse(iso) / 1000

describe('local days and minutes', () => {
  it('know summer time: 2026-10-25 has 25 hours, 2026-03-29 has 23 (EU and UK rule: last Sundays, 01:00 UTC)', () => {
    expect(london.at(at('2026-10-25T00:30:00Z')).minute).toBe(90)
    expect(london.at(at('2026-10-25T01:30:00Z')).minute).toBe(90)
    expect(london.at(at('2026-03-29T00:59:00Z')).minute).toBe(59)
    expect(london.at(at('2026-03-29T01:00:00Z')).minute).toBe(120)
    const length = (date: string) => london.instant(dayOf(date) + 1, 0) - london.instant(dayOf(date), 0)
    expect([length('2026-10-25'), length('2026-03-29'), length('2026-12-01')]).toEqual([90000, 82800, 86400])
  })

  it('go there and back', () => {
    for (const iso of ['2026-06-10T15:31:00Z', '2026-12-01T00:00:00Z', '2026-10-25T12:00:00Z']) {
      const local = london.at(at(iso))
      expect(london.instant(local.day, local.minute)).toBe(at(iso))
    }
  })

  it('count days, weekdays and clock times', () => {
    expect(dateOf(dayOf('2026-02-28') + 1)).toBe('2026-03-01')
    expect(weekdayOf(dayOf('2026-12-01'))).toBe(2) // a Tuesday
    expect(minuteOf('17:30')).toBe(1050)
    expect(() => minuteOf('noon')).toThrow(RangeError)
    expect(() => new LocalTime('Nowhere/Atlantis')).toThrow(/unknown time zone/)
  })
})

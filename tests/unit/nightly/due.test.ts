import { describe, expect, it } from 'vitest'
import { nightWindow } from '@/ingest/nightly/analysis/window'
import { dueNights, lastWholeWeek, nightsReading, nightsToRepeat } from '@/ingest/nightly/due'

const s = (instant: string) => Date.parse(instant) / 1000
const due = (
  timeZone: string,
  now: string,
  runs: { localDate: string; provisional: boolean }[] = [],
  firstDate: string | null = '2026-06-01',
) => dueNights({ timeZone, nowS: s(now), firstDate, runs })
const ran = (localDate: string, provisional: boolean) => ({ localDate, provisional })

describe('when a night is due', () => {
  it('is never due while there are no readings', () => {
    expect(due('Europe/Berlin', '2026-06-10T12:00:00Z', [], null)).toEqual([])
  })

  it('is due provisionally from 04:00 local of the next day', () => {
    expect(due('Europe/Berlin', '2026-06-02T01:59:00Z')).toEqual([])
    expect(due('Europe/Berlin', '2026-06-02T02:00:00Z')).toEqual(['2026-06-01'])
    // Kathmandu is at UTC +05:45, Auckland at +12, Los Angeles at −7
    expect(due('Asia/Kathmandu', '2026-06-01T22:14:00Z')).toEqual([])
    expect(due('Asia/Kathmandu', '2026-06-01T22:15:00Z')).toEqual(['2026-06-01'])
    expect(due('Pacific/Auckland', '2026-06-01T16:00:00Z')).toEqual(['2026-06-01'])
    expect(due('America/Los_Angeles', '2026-06-02T10:59:00Z')).toEqual([])
    expect(due('America/Los_Angeles', '2026-06-02T11:00:00Z')).toEqual(['2026-06-01'])
  })

  it('is due for good from noon local, once', () => {
    const early = [ran('2026-06-01', true)]
    expect(due('Europe/Berlin', '2026-06-02T09:59:00Z', early)).toEqual([])
    expect(due('Europe/Berlin', '2026-06-02T10:00:00Z', early)).toEqual(['2026-06-01'])
    expect(due('Europe/Berlin', '2026-06-02T10:00:00Z', [ran('2026-06-01', false)])).toEqual([])
  })

  it('makes up for every night that no runner saw, oldest first', () => {
    const runs = [ran('2026-06-01', false), ran('2026-06-03', true)]
    expect(due('Europe/Berlin', '2026-06-06T08:00:00Z', runs)).toEqual([
      '2026-06-02',
      '2026-06-03',
      '2026-06-04',
      '2026-06-05',
    ])
  })

  it('counts the hours of the wall on the days the clocks change', () => {
    // 28 March into 29 March 2026 in Berlin: 04:00 is two hours after midnight UTC +1, but only 02:00 UTC
    expect(due('Europe/Berlin', '2026-03-29T01:59:00Z', [], '2026-03-28')).toEqual([])
    expect(due('Europe/Berlin', '2026-03-29T02:00:00Z', [], '2026-03-28')).toEqual(['2026-03-28'])
    expect(due('Europe/Berlin', '2026-10-25T02:59:00Z', [], '2026-10-24')).toEqual([])
    expect(due('Europe/Berlin', '2026-10-25T03:00:00Z', [], '2026-10-24')).toEqual(['2026-10-24'])
  })
})

describe('which nights read an hour', () => {
  it('is one night after noon and two in the morning', () => {
    expect(nightsReading(s('2026-06-02T13:00:00Z'), 'Europe/Berlin')).toEqual(['2026-06-02'])
    expect(nightsReading(s('2026-06-02T05:00:00Z'), 'Europe/Berlin')).toEqual(['2026-06-01', '2026-06-02'])
    // 22:00 to 24:00 is read by the next day as well
    expect(nightsReading(s('2026-06-02T20:00:00Z'), 'Europe/Berlin')).toEqual(['2026-06-02', '2026-06-03'])
    expect(nightsReading(s('2026-06-02T19:00:00Z'), 'Europe/Berlin')).toEqual(['2026-06-02'])
  })

  it('repeats only nights that ran for good', () => {
    const lateHoursS = [s('2026-06-02T05:00:00Z'), s('2026-06-02T05:00:00Z')]
    const runs = [ran('2026-06-01', false), ran('2026-06-02', true)]
    expect(nightsToRepeat({ timeZone: 'Europe/Berlin', lateHoursS, runs })).toEqual(['2026-06-01'])
    expect(nightsToRepeat({ timeZone: 'Europe/Berlin', lateHoursS: [], runs })).toEqual([])
  })
})

describe('the window of a night', () => {
  it('refuses what is no date and no zone, and says so', () => {
    expect(() => nightWindow('2026-02-30', 'Europe/Berlin')).toThrow(
      'not a calendar date YYYY-MM-DD: 2026-02-30',
    )
    expect(() => nightWindow('yesterday', 'Europe/Berlin')).toThrow(/not a calendar date/)
    expect(() => nightWindow('2026-02-03', 'Europe/Atlantis')).toThrow(
      'not a time zone that is known here: Europe/Atlantis',
    )
  })
})

it('finds the last whole week by local date', () => {
  // Sunday 23:30 in Berlin is still the week; Monday 00:30 is not
  expect(lastWholeWeek(s('2026-06-07T21:30:00Z'), 'Europe/Berlin')).toBe('2026-05-25')
  expect(lastWholeWeek(s('2026-06-07T22:30:00Z'), 'Europe/Berlin')).toBe('2026-06-01')
  expect(lastWholeWeek(s('2026-06-07T12:30:00Z'), 'Pacific/Auckland')).toBe('2026-06-01')
})

import { describe, expect, it } from 'vitest'
import { dayFacts, outdoorLevelOf } from '@/ingest/nightly/analysis/day-facts'
import { withOffsets } from '@/ingest/nightly/analysis/offsets'
import type { Series } from '@/lib/air/types'

const HOUR_S = 3600
const limit = { kind: 'above outdoor' as const, ppm: 800 }
const noReadings: Series = { timeS: new Float64Array(0), co2Ppm: new Float64Array(0) }

/** One reading a minute, whose level is given by minutes of the day. */
function minutes(level: (minute: number) => number | null, count = 24 * 60): Series {
  const kept = Array.from({ length: count }, (_, minute) => ({ minute, ppm: level(minute) })).filter(
    (one) => one.ppm !== null,
  )
  return {
    timeS: Float64Array.from(kept, (one) => one.minute * 60),
    co2Ppm: Float64Array.from(kept, (one) => one.ppm as number),
  }
}

const facts = (series: Series, occupied = [{ fromS: 8 * HOUR_S, toS: 18 * HOUR_S }]) =>
  dayFacts({ series, intervalS: 60, dayStartS: 0, dayEndS: 24 * HOUR_S, outdoorPpm: 400, limit, occupied })

describe('the facts of a day', () => {
  it('times a step over the limit by its 15 min mean', () => {
    // 400 ppm, and 1600 from 10:00 to 12:00: the mean passes 1200 after 10 min and falls below after 5 min
    const day = facts(minutes((minute) => (minute >= 600 && minute < 720 ? 1600 : 400)))
    expect(day.limitPpm).toBe(1200)
    expect(day.peakPpm).toBe(1600)
    // at 10 and 5 min it stands on the limit, not over it
    expect(day.overMin).toBe(115 - 1)
    expect(day.occupiedMin).toBe(600)
    expect(day.coveredMin).toBe(600)
  })

  it('counts only the hours in which people use the room', () => {
    const night = facts(minutes((minute) => (minute < 360 ? 1600 : 400)))
    expect(night.overMin).toBe(0)
    expect(night.peakPpm).toBe(1600)
    expect(
      facts(
        minutes(() => 1600),
        [],
      ).overMin,
    ).toBe(0)
  })

  it('takes a gap neither as over nor as under', () => {
    const day = facts(minutes((minute) => (minute >= 600 && minute < 720 ? null : 1600)))
    expect(day.coveredMin).toBeGreaterThan(600 - 120 - 1)
    expect(day.coveredMin).toBeLessThan(600 - 100)
    expect(day.overMin).toBe(day.coveredMin)
  })

  it('says nothing of a day without readings', () => {
    expect(facts(noReadings)).toEqual({
      outdoorPpm: 400,
      limitPpm: 1200,
      peakPpm: null,
      peakAtS: null,
      overMin: 0,
      occupiedMin: 600,
      coveredMin: 0,
    })
    // two readings hold for six minutes, less than half of a quarter of an hour
    expect(facts(minutes(() => 1600, 2)).peakPpm).toBeNull()
  })

  it('takes an absolute limit as it is', () => {
    const day = dayFacts({
      series: minutes(() => 1100),
      intervalS: 60,
      dayStartS: 0,
      dayEndS: 24 * HOUR_S,
      outdoorPpm: 400,
      limit: { kind: 'absolute', ppm: 1000 },
      occupied: [],
    })
    expect(day.limitPpm).toBe(1000)
  })

  it('takes the middle of the outdoor record, and the default without one', () => {
    expect(
      outdoorLevelOf(
        minutes((minute) => 420 + (minute % 3)),
        430,
      ),
    ).toBe(421)
    expect(outdoorLevelOf(undefined, 430)).toBe(430)
    expect(outdoorLevelOf(noReadings, 430)).toBe(430)
  })
})

describe('offsets of fresh-air checks', () => {
  const series = { timeS: Float64Array.of(0, 60, 120, 180), co2Ppm: Float64Array.of(500, 500, 500, 500) }
  const offset = (atS: number, offsetPpm: number) => ({ fromAt: new Date(atS * 1000), offsetPpm })

  it('adds the latest one from its instant on, and never touches the raw record', () => {
    expect([...withOffsets(series, [offset(60, 20), offset(180, -5)]).co2Ppm]).toEqual([500, 520, 520, 495])
    expect([...series.co2Ppm]).toEqual([500, 500, 500, 500])
  })

  it('gives the record itself where none applies yet', () => {
    expect(withOffsets(series, [])).toBe(series)
    expect(withOffsets(series, [offset(181, 20)])).toBe(series)
    expect(withOffsets(noReadings, [offset(0, 20)])).toBe(noReadings)
  })
})

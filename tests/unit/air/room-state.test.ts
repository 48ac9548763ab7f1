import { describe, expect, test } from 'vitest'
import { findEbb } from '@/lib/air/room-ebb'
import {
  glassLevel,
  type LiveReading,
  limitLevelPpm,
  readFromS,
  roomState,
  silentAfterS,
} from '@/lib/air/room-state'
import { timeOverLimit } from '@/lib/air/running-mean'
import { seededRandom } from '@/lib/math/seeded'

const OUTDOOR = 430
const LIMIT = 1230
const NOON = Date.UTC(2026, 5, 10, 12) / 1000
const DAY_START = Date.UTC(2026, 5, 10) / 1000

/** Exact response of one well-mixed zone, minute by minute: dC/dt = −A (C − Cb) + source. Common practice, no source. */
function zone(
  steps: readonly { minutes: number; ratePerHour: number; towardsPpm: number }[],
  startPpm: number,
  noisePpm = 0,
) {
  const random = seededRandom(7)
  const total = steps.reduce((sum, { minutes }) => sum + minutes, 0)
  const readings: LiveReading[] = []
  let ppm = startPpm
  let timeS = NOON - total * 60
  for (const { minutes, ratePerHour, towardsPpm } of steps) {
    for (let i = 0; i < minutes; i += 1) {
      ppm = towardsPpm + (ppm - towardsPpm) * Math.exp(-ratePerHour / 60)
      timeS += 60
      readings.push({ timeS, co2Ppm: ppm + noisePpm * random.normal() })
    }
  }
  return readings
}

const stateOf = (readings: readonly LiveReading[], more: Partial<Parameters<typeof roomState>[0]> = {}) =>
  roomState({
    nowS: NOON,
    readings,
    outdoorPpm: OUTDOOR,
    limitPpm: LIMIT,
    sensor: { intervalS: 60, suspectSinceS: null },
    dayStartS: DAY_START,
    ...more,
  })

const flat = (ppm: number, minutes = 120) => zone([{ minutes, ratePerHour: 1, towardsPpm: ppm }], ppm)

describe('the state of a room', () => {
  test('is in range below 85 % of the glass and near the limit from there on', () => {
    const near = OUTDOOR + 0.85 * (LIMIT - OUTDOOR)
    expect(stateOf(flat(near - 5)).state).toBe('in range')
    expect(stateOf(flat(near + 5)).state).toBe('near the limit')
  })

  test('is over the limit by the mean of 15 min, not by one reading', () => {
    const spike = flat(900)
    spike[spike.length - 1] = { timeS: NOON, co2Ppm: 1500 }
    expect(stateOf(spike).state).toBe('near the limit')
    const over = stateOf(flat(1300, 60))
    expect(over.state).toBe('over the limit')
    // the mean is whole from 7.5 min of readings on: half its window
    expect((NOON - (over.overSinceS ?? 0)) / 60).toBeGreaterThan(48)
    expect(over.level).toBeCloseTo(glassLevel(1300, OUTDOOR, LIMIT), 6)
  })

  test('has no signal after five of the sensor’s own intervals, whatever its level was', () => {
    const old = flat(1300).map(({ timeS, co2Ppm }) => ({ timeS: timeS - 400, co2Ppm }))
    const silent = stateOf(old)
    expect(silent.state).toBe('no signal')
    expect(silent.co2Ppm).toBeCloseTo(1300, 6)
    expect(silent.overSinceS).toBeNull()
    expect(stateOf(old, { sensor: { intervalS: 600, suspectSinceS: null } }).state).toBe('over the limit')
    expect(silentAfterS(60)).toBe(300)
    expect(silentAfterS(10)).toBe(180)
  })

  test('without any reading there is nothing to show, and no time at which it was last heard', () => {
    expect(stateOf([])).toMatchObject({ state: 'no signal', co2Ppm: null, atS: null, level: null })
  })

  test('a suspect sensor is suspect before its number counts', () => {
    expect(stateOf(flat(1500), { sensor: { intervalS: 60, suspectSinceS: NOON - 3600 } }).state).toBe(
      'sensor suspect',
    )
  })

  test('5000 ppm or more is unusual at once', () => {
    const readings = [...flat(600), { timeS: NOON, co2Ppm: 5000 }]
    expect(stateOf(readings).unusual).toBe(true)
    expect(stateOf(flat(4999)).unusual).toBe(false)
  })

  test('counts the minutes over the limit of this local day alone', () => {
    const readings = flat(1400, 14 * 60)
    // since midnight there are 12 h; the record began two hours before it
    expect(stateOf(readings).overTodayMin).toBe(720)
  })

  test('rising towards the limit says in how many minutes', () => {
    const rising = zone([{ minutes: 20, ratePerHour: 2, towardsPpm: 1600 }], 600)
    const live = stateOf(rising)
    expect(live.trend).toBe('rising')
    // 1087 ppm now, 143 below the limit; the mean slope of the last 15 min is about 21 ppm a minute
    expect(live.limitInMin).toBeGreaterThan(5)
    expect(live.limitInMin).toBeLessThan(9)
    expect(stateOf(flat(700)).limitInMin).toBeNull()
  })
})

describe('falling after people left', () => {
  const occupied = { minutes: 90, ratePerHour: 2.4, towardsPpm: 1150 }

  test.each([0, 4, 8])(
    'is seen with noise of %i ppm, with a mark every 10 min from when they left',
    (noise) => {
      const live = stateOf(
        zone([occupied, { minutes: 35, ratePerHour: 2.4, towardsPpm: OUTDOOR }], 430, noise),
      )
      expect(live.state).toBe('falling')
      expect(Math.abs((NOON - (live.emptySinceS ?? 0)) / 60 - 35)).toBeLessThanOrEqual(5)
      expect(live.ebbMarks.length).toBeGreaterThanOrEqual(3)
      expect(live.ebbMarks).toEqual([...live.ebbMarks].sort((a, b) => b - a))
    },
  )

  test('slow air gives close marks, quick air wide ones', () => {
    const gap = (ratePerHour: number) => {
      const marks = stateOf(zone([occupied, { minutes: 30, ratePerHour, towardsPpm: OUTDOOR }], 430)).ebbMarks
      return (marks[0] ?? 0) - (marks[1] ?? 0)
    }
    expect(gap(4)).toBeGreaterThan(2 * gap(1))
  })

  test('is not said while half of the people stay: the fall bends towards their level', () => {
    const half = zone([occupied, { minutes: 60, ratePerHour: 2.4, towardsPpm: 790 }], 430)
    expect(findEbb(half, OUTDOOR)).toBeNull()
  })

  test('ends when the room has reached outdoor air, and when people come back', () => {
    const ebbed = zone([occupied, { minutes: 170, ratePerHour: 2.4, towardsPpm: OUTDOOR }], 430)
    expect(findEbb(ebbed, OUTDOOR)).toBeNull()
    const back = [
      occupied,
      { minutes: 40, ratePerHour: 2.4, towardsPpm: OUTDOOR },
      { minutes: 20, ratePerHour: 2.4, towardsPpm: 1150 },
    ]
    expect(findEbb(zone(back, 430), OUTDOOR)).toBeNull()
  })

  test('a level that stands is not falling, whatever its noise', () => {
    expect(findEbb(zone([{ minutes: 180, ratePerHour: 1, towardsPpm: 800 }], 800, 8), OUTDOOR)).toBeNull()
  })
})

describe('time over a limit', () => {
  test('a gap is neither over nor under', () => {
    const early = flat(1400, 30).map(({ timeS, co2Ppm }) => ({ timeS: timeS - 6 * 3600, co2Ppm }))
    const over = timeOverLimit(early, { limitPpm: LIMIT, nowS: NOON, dayStartS: DAY_START, holdS: 300 })
    expect(over.overSinceS).toBeNull()
    expect(over.meanPpm).toBeNull()
    expect(over.overTodayMin).toBeGreaterThan(20)
    expect(over.overTodayMin).toBeLessThan(45)
  })

  test('a sensor that reports every ten minutes holds its value between reports', () => {
    const sparse = flat(1400, 120).filter((_, i) => i % 10 === 9)
    expect(
      timeOverLimit(sparse, { limitPpm: LIMIT, nowS: NOON, dayStartS: DAY_START, holdS: 3000 }).meanPpm,
    ).toBeCloseTo(1400, 6)
  })
})

test('a limit above outdoor air is added to it, an absolute one stands', () => {
  expect(limitLevelPpm({ kind: 'above outdoor', ppm: 800 }, 430)).toBe(1230)
  expect(limitLevelPpm({ kind: 'absolute', ppm: 1000 }, 430)).toBe(1000)
})

test('what must be read reaches back past midnight by the averaging time, and three hours at least', () => {
  expect(readFromS(NOON, DAY_START)).toBe(DAY_START - 900)
  expect(readFromS(DAY_START + 600, DAY_START)).toBe(DAY_START + 600 - 3 * 3600)
})

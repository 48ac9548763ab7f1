/** Which ventilation mode a decay speaks for: status, fellows on one air handler, schedule; and what is said when they disagree. */
import { describe, expect, it } from 'vitest'
import { analyseBuildingDay, type BuildingRoom } from '@/lib/air/analyse-building'
import { habitualStop, scheduledMode, sharedStops, statusMode } from '@/lib/air/decay/modes'
import { seededRandom } from '@/lib/math/seeded'
import { localToEpochS } from '@/lib/time'

const ZONE = 'Europe/Berlin'
const DATE = '2026-03-03'
const at = (clock: string) => localToEpochS(DATE, clock, ZONE)
const dayStartS = at('00:00')
const weekdays = [1, 2, 3, 4, 5]

/** A day of one room, exact between steps, minute by minute with 4 ppm noise: people until `leave`, supply until `stop`. */
function room(id: string, seed: number, leave: string, stop: string, extra: object = {}): BuildingRoom {
  const random = seededRandom(seed)
  const timeS: number[] = []
  const co2Ppm: number[] = []
  let ppm = 430
  for (let t = dayStartS - 7200; t <= dayStartS + 36 * 3600; t += 60) {
    const nextDay = t >= at('23:59') + 60
    const on = nextDay ? t >= at('06:00') + 86_400 : t >= at('06:00') && t < at(stop)
    const rate = on ? 2 : 0.2
    const people = t >= at('08:30') && t < at(leave)
    const target = 430 + (people ? 900 : 0)
    ppm = target + (ppm - target) * Math.exp(-rate / 60)
    timeS.push(t)
    co2Ppm.push(Math.round(ppm + 4 * random.normal()))
  }
  const spec = { id, volumeM3: 120, airHandler: 'east', ...extra }
  return { room: spec, series: { timeS: Float64Array.from(timeS), co2Ppm: Float64Array.from(co2Ppm) } }
}

function analyse(rooms: BuildingRoom[]) {
  return analyseBuildingDay({ timeZone: ZONE, date: DATE, dayStartS, dayEndS: dayStartS + 86_400, rooms })
}

const until = (to: string) => [{ days: weekdays, from: '06:00', to }]

describe('rooms on one air handler that slow together', () => {
  const rooms = ['16:50', '17:00', '16:55'].map((leave, i) => room(`r${i}`, i + 1, leave, '17:30'))

  it('show when it stopped, to a few minutes, and give modes before and after', () => {
    const days = analyse(rooms)
    for (const day of days) {
      expect(day.supplyStops).toHaveLength(1)
      expect(Math.abs(day.supplyStops[0]!.atS - at('17:30'))).toBeLessThan(240)
      expect(day.supplyStops[0]!.rooms).toBe(3)
      const given = day.decays.filter((decay) => decay.quality !== 'refused' && decay.startS > at('16:00'))
      expect(given.map((decay) => decay.mode)).toEqual(['supply on', 'supply off'])
      expect(given.every((decay) => decay.modeFrom === 'inferred')).toBe(true)
      expect(given[0]!.airChangeRatePerHour!).toBeGreaterThan(1.7)
      expect(given[0]!.airChangeRatePerHour!).toBeLessThan(2.3)
      expect(given[1]!.airChangeRatePerHour!).toBeLessThan(0.25)
      expect(given[0]!.rateChangeAtS).toBe(given[1]!.rateChangeAtS)
    }
  })

  it('against a schedule that says 19:00: the mode afterwards is unknown and the early stop is told', () => {
    const scheduled = rooms.map((entry) => ({
      ...entry,
      room: { ...entry.room, supplyHours: until('23:00') },
    }))
    for (const day of analyse(scheduled)) {
      const evening = day.decays.filter((decay) => decay.quality !== 'refused' && decay.startS > at('16:00'))
      expect(evening[0]!.mode).toBe('supply on')
      expect(evening[1]!.mode).toBe('unknown')
      expect(day.notes.map((note) => note.code)).toContain('supply-stopped-early')
    }
  })
})

it('a room alone has only its schedule, and a status signal beats it', () => {
  const alone = room('r9', 9, '17:00', '21:00', { supplyHours: until('21:00') })
  const evening = (entry: BuildingRoom) =>
    analyse([entry])[0]!.decays.find((decay) => decay.quality === 'accepted' && decay.startS > at('16:30'))!
  expect(evening(alone)).toMatchObject({ mode: 'supply on', modeFrom: 'schedule' })
  const supply = [{ timeS: dayStartS - 7200, state: 'reduced' as const }]
  expect(evening({ ...alone, supply })).toMatchObject({ mode: 'supply reduced', modeFrom: 'status' })
  const natural = { ...alone, room: { ...alone.room, air: 'natural' as const } }
  expect(evening(natural)).toMatchObject({ mode: 'natural' })
})

describe('the pieces', () => {
  it('a schedule counts local hours, over midnight too, and is silent across a change', () => {
    const hours = [{ days: [2], from: '22:00', to: '02:00' }]
    expect(scheduledMode(hours, at('22:30'), at('23:30'), ZONE)).toBe('supply on')
    expect(scheduledMode(hours, at('23:30'), at('23:59') + 3600, ZONE)).toBe('supply on')
    expect(scheduledMode(hours, at('20:00'), at('21:00'), ZONE)).toBe('supply off')
    expect(scheduledMode(hours, at('21:00'), at('23:00'), ZONE)).toBeNull()
  })

  it('a status signal holds until the next, and is silent where it changes inside', () => {
    const changes = [
      { timeS: 0, state: 'on' as const },
      { timeS: 1000, state: 'off' as const },
    ]
    expect(statusMode(changes, 100, 900)).toBe('supply on')
    expect(statusMode(changes, 2000, 3000)).toBe('supply off')
    expect(statusMode(changes, 500, 1500)).toBeNull()
  })

  it('one room, or hours far apart, are no shared stop; two at one hour are', () => {
    const drop = (roomId: string, atS: number) => ({
      roomId,
      atS,
      lowS: atS - 200,
      highS: atS + 200,
      before: 2,
      after: 0.2,
    })
    expect(sharedStops([drop('a', 0), drop('b', 7200)])).toEqual([])
    expect(sharedStops([drop('a', 0), drop('a', 60)])).toEqual([])
    const [stop] = sharedStops([drop('a', 0), drop('b', 300)])
    expect(stop!.atS).toBeCloseTo(150, 6)
    expect(stop!.to).toBe('supply off')
  })

  it('a habit needs two nights at one hour', () => {
    const stop = (date: string, clockS: number) => ({ date, clockS, to: 'supply off' as const })
    expect(habitualStop([stop('2026-03-01', 63_000), stop('2026-03-02', 40_000)], 0)).toBeNull()
    expect(habitualStop([stop('2026-03-01', 63_000), stop('2026-03-02', 63_400)], 0)!.atS).toBe(63_200)
  })
})

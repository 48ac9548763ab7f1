import { describe, expect, it } from 'vitest'
import { dayOf } from '@/ingest/simulator/local-time'
import { planDay } from '@/ingest/simulator/people/day-plan'
import { outdoorCo2Ppm } from '@/ingest/simulator/physics/weather'
import { sallowMill } from '@/ingest/simulator/scenario'
import { Simulation } from '@/ingest/simulator/simulation'
import type { StorySwitches } from '@/ingest/simulator/story'
import { type AirInterval, type RoomTruth, type Truth, truthOf } from '@/ingest/simulator/truth'
import { HISTORY_S, makeWorld } from '@/ingest/simulator/world'

const firstStartS = Date.parse('2026-12-01T13:42:00Z') / 1000
const at = (iso: string) => Date.parse(iso) / 1000
const worldWith = (stories: StorySwitches = {}) =>
  makeWorld(sallowMill, { seed: 1, firstStartS, historyS: HISTORY_S, stories })
const world = worldWith()
const truth = truthOf(world, world.historyStartS, firstStartS)
const room = (number: string, of: Truth = truth) => of.rooms.find((r) => r.number === number)!
const during = (r: RoomTruth, iso: string): AirInterval =>
  r.air_change.find((i) => i.from <= iso && iso < i.to)!

describe('the truth file', () => {
  it('covers the whole time of every room without gap or overlap', () => {
    for (const { air_change } of truth.rooms) {
      expect(air_change[0]!.from).toBe(truth.from)
      expect(air_change.at(-1)!.to).toBe(truth.to)
      expect(air_change.slice(1).map((next) => next.from)).toEqual(air_change.slice(0, -1).map((i) => i.to))
      for (const i of air_change) expect(i.total_ach).toBeGreaterThanOrEqual(i.outdoor_ach)
    }
  })

  it('agrees with what the simulated air does: a room decays at its rate whenever people have left', () => {
    // from the true concentrations, so that no sensor is in it; closed doors leave outdoor and total rate 2 % apart
    const historyS = 8 * 86400
    const near = makeWorld(sallowMill, { seed: 1, firstStartS, historyS })
    const simulation = new Simulation(near)
    const excess = (number: string, timeS: number) => {
      simulation.runTo(timeS / 60)
      return simulation.snapshot().co2Ppm[near.zoneIndex.get(number)!]! - outdoorCo2Ppm(1, timeS)
    }
    const { occupancy, air_change } = room('2.06')
    let decays = 0
    occupancy.slice(0, -1).forEach((stay, i) => {
      const [startS, endS] = [at(stay.to) + 120, at(stay.to) + 120 + 30 * 60]
      if (startS < near.historyStartS || at(occupancy[i + 1]!.from) < endS) return
      const air = air_change.find((a) => at(a.from) <= startS && endS <= at(a.to))
      if (!air) return
      const [a, b] = [excess('2.06', startS), excess('2.06', endS)]
      if (a < 150) return
      decays += 1
      const rate = 2 * Math.log(a / b)
      expect(rate / air.outdoor_ach).toBeGreaterThan(0.95)
      expect(rate / air.total_ach).toBeLessThan(1.05)
    })
    expect(decays).toBeGreaterThan(5)
  })

  it('has the day on which the building was shut: nobody in, no fan on but the one that always runs', () => {
    expect(truth.closed_dates).toEqual(['2026-10-28'])
    const sheet = planDay(world, dayOf('2026-10-28'))
    expect(sheet.persons.every((n) => n === 0)).toBe(true)
    expect(during(room('1.01'), '2026-10-28T11:00:00Z').supply).toBe('off')
    expect(during(room('2.08'), '2026-10-28T11:00:00Z').supply).toBe('on')
  })

  it('keeps people within what the rooms may hold, and the nights and week-ends empty', () => {
    const night = (iso: string) => ['22', '23', '00', '01', '02', '03', '04'].includes(iso.slice(11, 13))
    for (const plan of sallowMill.rooms) {
      for (const stay of room(plan.number).occupancy) {
        // a second class may come in while the first leaves
        if (plan.activity.kind !== 'lessons')
          expect(stay.persons_max).toBeLessThanOrEqual(plan.permittedOccupancy * 1.6)
        expect(night(stay.from)).toBe(false)
        expect([0, 6]).not.toContain(new Date(stay.from).getUTCDay())
      }
    }
  })
})

describe('the stories', () => {
  it('half supply: from three weeks before, at half the fan flow; gone when left out', () => {
    const before = during(room('2.02'), '2026-11-10T09:00:00Z')
    const after = during(room('2.02'), '2026-11-10T11:00:00Z')
    const fan = (i: AirInterval) => i.outdoor_ach - during(room('2.02'), '2026-11-10T05:00:00Z').outdoor_ach
    expect(fan(after) / fan(before)).toBeCloseTo(0.5, 4)
    const without = truthOf(
      worldWith({ halfSupply: false }),
      at('2026-11-09T12:00:00Z'),
      at('2026-11-11T12:00:00Z'),
    )
    expect(during(room('2.02', without), '2026-11-10T11:00:00Z').outdoor_ach).toBeCloseTo(
      before.outdoor_ach,
      1,
    )
  })

  it('early stop: the first floor stops at 17:30 from a Monday on, and stopped at 19:00 before', () => {
    const shuttle = room('1.05')
    expect(during(shuttle, '2026-11-06T18:00:00Z').supply).toBe('on')
    expect(during(shuttle, '2026-11-09T17:29:00Z').supply).toBe('on')
    expect(during(shuttle, '2026-11-09T17:31:00Z').supply).toBe('off')
    expect(during(shuttle, '2026-11-30T18:00:00Z').supply).toBe('off')
    expect(during(room('2.04'), '2026-11-30T18:00:00Z').supply).toBe('on')
  })

  it('night ventilation: the library is aired all night, and not when the story is left out', () => {
    expect(during(room('2.08'), '2026-11-22T03:00:00Z').outdoor_ach).toBeGreaterThan(1.8)
    const without = truthOf(
      worldWith({ nightVentilation: false }),
      at('2026-11-22T00:00:00Z'),
      at('2026-11-22T06:00:00Z'),
    )
    expect(during(room('2.08', without), '2026-11-22T03:00:00Z').outdoor_ach).toBeLessThan(0.4)
  })

  it('open door: more of the neighbour’s air than of the room’s own outdoor air', () => {
    const { outdoor_ach, total_ach } = during(room('2.03'), '2026-11-18T11:00:00Z')
    expect(total_ach - outdoor_ach).toBeCloseTo(190 / 78, 2)
    expect(outdoor_ach).toBeLessThan(2.6)
  })

  it('small room: meetings of twelve and more where six were planned for', () => {
    const large = (t: Truth) => room('1.02', t).occupancy.filter((stay) => stay.persons_max >= 12).length
    expect(large(truth)).toBeGreaterThan(60)
    const without = worldWith({ smallRoom: false })
    expect(large(truthOf(without, without.historyStartS, firstStartS))).toBe(0)
  })

  it('cleaners: evenings on every floor; none when the story is left out', () => {
    const visits = (t: Truth) => t.rooms.flatMap((r) => r.occupancy.filter((stay) => stay.cleaners))
    expect(visits(truth).length).toBeGreaterThan(500)
    expect(
      visits(truthOf(worldWith({ cleaners: false }), at('2026-11-16T00:00:00Z'), at('2026-11-21T00:00:00Z'))),
    ).toEqual([])
  })

  it('are told in the file, each with its date', () => {
    expect(truth.stories.map((s) => s.kind)).toEqual([
      'halfSupply',
      'earlyStop',
      'driftingSensor',
      'silentSensor',
      'nightVentilation',
      'smallRoom',
      'openDoor',
      'cleaners',
    ])
    expect(truth.stories[0]).toMatchObject({ room: '2.02', from: '2026-11-10T10:00:00Z' })
    const sensor = (id: string) => truth.sensors.find((s) => s.device_id === id)!
    expect(sensor('sm-205').faults).toMatchObject([{ kind: 'drift', ppm_per_day: -1.6 }])
    expect(sensor('sm-105').faults).toMatchObject([{ kind: 'silent' }])
    expect(sensor('sm-202').faults).toEqual([])
  })
})

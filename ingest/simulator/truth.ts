import { roomKey } from './keys'
import { dateOf } from './local-time'
import { dayPlans } from './people/day-plan'
import type { DaySheet } from './people/day-sheet'
import { Plant } from './physics/plant'
import { characterOf, gapsBetween } from './sensing/faults'
import { storyRecords } from './story'
import type { World } from './world'

export type AirInterval = {
  from: string
  to: string
  /** outdoor air, by fan, window or crack, over the volume, 1/h */
  outdoor_ach: number
  /** all air that replaces the room's own: outdoor, return and neighbours' air, 1/h */
  total_ach: number
  supply: 'on' | 'off' | 'none'
}
export type OccupiedInterval = {
  from: string
  to: string
  persons_max: number
  persons_mean: number
  cleaners: boolean
}
export type RoomTruth = {
  id: string
  number: string
  name: string
  volume_m3: number
  air_handler: string | null
  air_change: AirInterval[]
  occupancy: OccupiedInterval[]
}
export type Truth = {
  seed: number
  time_zone: string
  first_start: string
  from: string
  to: string
  stories: Record<string, unknown>[]
  closed_dates: string[]
  rooms: RoomTruth[]
  sensors: Record<string, unknown>[]
}

const iso = (timeS: number) => new Date(timeS * 1000).toISOString().replace('.000Z', 'Z')

/**
 * What was in force at the mill between two instants: air-change rates, people, faults. Made from the schedules alone, without
 * the concentrations; the simulator's flows and people come from the same places.
 */
export function truthOf(world: World, fromS: number, toS: number): Truth {
  const plant = new Plant(world)
  const rooms = world.zones.map((zone, z) => new RoomRecorder(world, plant, z, zone.volumeM3))
  const closed = new Set<string>()
  const planOf = dayPlans(world)
  const [first, last] = [Math.floor(fromS / 60), Math.floor(toS / 60)]
  for (let m = first; m < last; m++) {
    const { day, minute } = world.local.at(m * 60)
    if (world.isClosed(day)) closed.add(dateOf(day))
    plant.setTo(m * 60)
    for (const room of rooms) room.record(m, minute, planOf(day))
  }
  return {
    seed: world.seed,
    time_zone: world.scenario.building.timeZone,
    first_start: iso(world.firstStartS),
    from: iso(first * 60),
    to: iso(last * 60),
    stories: storyRecords(world.story),
    closed_dates: [...closed],
    rooms: rooms.map((room) => room.finish(last)),
    sensors: sensorTruth(world, fromS, toS),
  }
}

/** Collects one zone's intervals minute by minute. */
class RoomRecorder {
  private readonly air: AirInterval[] = []
  private readonly people: OccupiedInterval[] = []
  private current: { from: number; outdoor: number; total: number; supply: AirInterval['supply'] } | null =
    null
  private stay: { from: number; max: number; sum: number; cleaners: boolean } | null = null
  private readonly exchanges: number[]

  constructor(
    private readonly world: World,
    private readonly plant: Plant,
    private readonly z: number,
    private readonly volumeM3: number,
  ) {
    this.exchanges = plant.net.exchanges.flatMap((e, i) => (e.a === z || e.b === z ? [i] : []))
  }

  record(m: number, localMinute: number, sheet: DaySheet): void {
    const { net, outdoorTotalM3PerHour, running } = this.plant
    let total = net.outdoorM3PerHour[this.z]! + net.supplyM3PerHour[this.z]!
    for (const e of this.exchanges) total += net.exchangeM3PerHour[e]!
    const outdoor = outdoorTotalM3PerHour[this.z]!
    const on = running[this.z] === 1 ? 'on' : 'off'
    const supply = this.world.zones[this.z]!.airHandler === null ? 'none' : on
    const c = this.current
    if (!c || c.outdoor !== outdoor || c.total !== total || c.supply !== supply) {
      this.closeAir(m)
      this.current = { from: m, outdoor, total, supply }
    }
    this.recordPeople(m, this.z * 1440 + localMinute, sheet)
  }

  private recordPeople(m: number, cell: number, sheet: DaySheet): void {
    const persons = sheet.persons[cell]!
    if (persons === 0) {
      this.closeStay(m)
      return
    }
    this.stay ??= { from: m, max: 0, sum: 0, cleaners: false }
    this.stay.max = Math.max(this.stay.max, persons)
    this.stay.sum += persons
    if (sheet.cleaners[cell] === 1) this.stay.cleaners = true
  }

  private closeAir(m: number): void {
    if (!this.current) return
    const perHour = (flow: number) => Math.round((flow / this.volumeM3) * 1e6) / 1e6
    this.air.push({
      from: iso(this.current.from * 60),
      to: iso(m * 60),
      outdoor_ach: perHour(this.current.outdoor),
      total_ach: perHour(this.current.total),
      supply: this.current.supply,
    })
    this.current = null
  }

  private closeStay(m: number): void {
    if (!this.stay) return
    this.people.push({
      from: iso(this.stay.from * 60),
      to: iso(m * 60),
      persons_max: this.stay.max,
      persons_mean: Math.round((100 * this.stay.sum) / (m - this.stay.from)) / 100,
      cleaners: this.stay.cleaners,
    })
    this.stay = null
  }

  finish(m: number): RoomTruth {
    this.closeAir(m)
    this.closeStay(m)
    const zone = this.world.zones[this.z]!
    return {
      id: roomKey(zone),
      number: zone.number,
      name: zone.name,
      volume_m3: zone.volumeM3,
      air_handler: zone.airHandler,
      air_change: this.air,
      occupancy: this.people,
    }
  }
}

function sensorTruth(world: World, fromS: number, toS: number): Record<string, unknown>[] {
  const { story, seed } = world
  return world.scenario.sensors.map((sensor, order) => {
    const character = characterOf(seed, sensor, order)
    const zone = world.zones.find((z) => z.number === sensor.place)
    const drifts = story.switches.driftingSensor && story.driftingSensor.deviceId === sensor.deviceId
    const silent = story.switches.silentSensor && story.silentSensor.deviceId === sensor.deviceId
    return {
      device_id: sensor.deviceId,
      room: zone ? roomKey(zone) : null,
      position: sensor.position,
      offset_ppm: Math.round(character.offsetPpm * 100) / 100,
      gain: Math.round(character.gain * 1e5) / 1e5,
      noise_ppm: sensor.model.noisePpm,
      lag_s: sensor.model.lagS,
      resolution_ppm: sensor.model.resolutionPpm,
      faults: [
        ...(drifts
          ? [
              {
                kind: 'drift',
                from: iso(story.driftingSensor.fromS),
                ppm_per_day: story.driftingSensor.ppmPerDay,
              },
            ]
          : []),
        ...(silent ? [{ kind: 'silent', from: iso(story.silentSensor.fromS) }] : []),
      ],
      gaps: gapsBetween(seed, character, fromS, toS).map((g) => ({ from: iso(g.fromS), to: iso(g.toS!) })),
    }
  })
}

import { minuteOf } from '../local-time'
import { hashText, normalAt } from '../random'
import type { RoomPlan } from '../scenario'
import type { World } from '../world'
import { makeNetwork, type ZoneNetwork } from './zone-network'

type Span = { days: readonly number[]; from: number; to: number }
const isRoom = (zone: World['zones'][number]): zone is RoomPlan => 'activity' in zone
const covers = (spans: readonly Span[], weekday: number, minute: number) =>
  spans.some((s) => minute >= s.from && minute < s.to && s.days.includes(weekday))

/** The mill's air: which flows run at an instant, from schedules, stories and the day's wind. */
export class Plant {
  readonly net: ZoneNetwork
  /** outdoor air that reaches each zone by whatever way, m³/h; for return-air rooms their share of the outdoor intake */
  readonly outdoorTotalM3PerHour: Float64Array
  /** is the air handler of each zone running (1) or not (0) */
  readonly running: Uint8Array
  private readonly handlers: {
    code: string
    spans: Span[]
    recirculating: boolean
    outdoorFraction: number
  }[]
  private readonly wind = new Map<number, number>()
  private readonly open: Span
  private readonly windStream = hashText('wind')

  constructor(private readonly world: World) {
    const { scenario, zones, zoneIndex, corridorOfFloor } = world
    this.handlers = scenario.airHandlers.map((h) => ({
      code: h.code,
      spans: h.hours.map((w) => ({ days: w.days, from: minuteOf(w.from), to: minuteOf(w.to) })),
      recirculating: h.airSystem === 'recirculating',
      outdoorFraction: h.outdoorFraction,
    }))
    const doors = scenario.rooms.map((room) => ({
      a: zoneIndex.get(room.number)!,
      b: corridorOfFloor.get(room.floor)!,
    }))
    const landings = scenario.corridors.map((c) => zoneIndex.get(c.number)!)
    const stairs = landings.slice(1).map((b, i) => ({ a: landings[i]!, b }))
    const groups = this.handlers
      .filter((h) => h.recirculating)
      .map((h) => ({
        zones: zones.flatMap((zone, i) => (zone.airHandler === h.code ? [i] : [])),
        outdoorFraction: h.outdoorFraction,
      }))
    const volumes = zones.map((zone) => zone.volumeM3)
    this.net = makeNetwork(volumes, [...doors, ...stairs], groups)
    this.outdoorTotalM3PerHour = new Float64Array(zones.length)
    this.running = new Uint8Array(zones.length)
    const { openFrom, openTo } = scenario.building
    this.open = { days: [1, 2, 3, 4, 5], from: minuteOf(openFrom), to: minuteOf(openTo) }
  }

  /** Does an air handler run at a local minute? The documents' hours, unless a story makes it do otherwise. */
  private runs(
    handler: (typeof this.handlers)[number],
    day: number,
    weekday: number,
    minute: number,
  ): boolean {
    const { story } = this.world
    if (story.switches.nightVentilation && handler.code === story.nightVentilation.airHandler) return true
    if (this.world.isClosed(day) || !covers(handler.spans, weekday, minute)) return false
    const early = story.switches.earlyStop && handler.code === story.earlyStop.airHandler
    return !(early && day >= story.earlyStop.fromDay && minute >= minuteOf(story.earlyStop.stopsAt))
  }

  /** The wind's factor on air through cracks and windows, one value from noon to noon (median 1, spread 15 %). */
  private windFactor(timeS: number): number {
    const noonDay = Math.floor((timeS + this.world.local.offsetS(timeS) - 43200) / 86400)
    let factor = this.wind.get(noonDay)
    if (factor === undefined) {
      const z = Math.max(-2, Math.min(2, normalAt(this.world.seed, this.windStream, noonDay)))
      factor = Math.exp(0.15 * z)
      this.wind.set(noonDay, factor)
    }
    return factor
  }

  /** Sets every flow of the network to what it is at an instant. */
  setTo(timeS: number): void {
    const { zones, scenario, story, isClosed } = this.world
    const { day, minute, weekday } = this.world.local.at(timeS)
    const wind = this.windFactor(timeS)
    const isOpen = !isClosed(day) && covers([this.open], weekday, minute)
    const state = new Map(
      this.handlers.map((h) => [h.code, { on: this.runs(h, day, weekday, minute), ...h }]),
    )
    zones.forEach((zone, z) => {
      const handler = zone.airHandler === null ? undefined : state.get(zone.airHandler)
      const on = handler?.on === true
      const supply = on ? this.supplyM3PerHour(zone, timeS) : 0
      let outside = zone.infiltrationRatePerHour * zone.volumeM3 * wind
      if (isRoom(zone) && isOpen)
        // the caretaker opens and shuts the roof vents with the house
        outside += zone.roofVentRatePerHour * zone.volumeM3 * wind
      const returned = handler?.recirculating === true
      this.running[z] = on ? 1 : 0
      this.net.outdoorM3PerHour[z] = outside + (returned ? 0 : supply)
      this.net.supplyM3PerHour[z] = returned ? supply : 0
      this.outdoorTotalM3PerHour[z] = outside + supply * (handler?.outdoorFraction ?? 1)
    })
    scenario.rooms.forEach((room, i) => {
      const held = story.switches.openDoor && isOpen && room.number === story.openDoor.room
      this.net.exchangeM3PerHour[i] = held ? story.openDoor.exchangeM3PerHour : room.doorLeakM3PerHour
    })
    this.net.exchangeM3PerHour.fill(scenario.stairExchangeM3PerHour, scenario.rooms.length)
  }

  private supplyM3PerHour(zone: World['zones'][number], timeS: number): number {
    const { story } = this.world
    const halved =
      story.switches.halfSupply && zone.number === story.halfSupply.room && timeS >= story.halfSupply.fromS
    return zone.supplyLps * 3.6 * (halved ? story.halfSupply.factor : 1)
  }
}

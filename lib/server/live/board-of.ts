import type { BoardPlan, BoardSensor } from '@/db/queries/board'
import { type LiveReading, limitLevelPpm, roomState, silentAfterS } from '@/lib/air/room-state'
import { supplySpans } from '@/lib/format/supply-spans'
import { localDate, localDayBounds } from '@/lib/time'
import type { Board, BoardFloor, RoomTile } from '@/lib/wire/live-board'

type Known = ReadonlyMap<number, readonly LiveReading[]>

/** Outdoor air is averaged over this time, so that a gust of exhaust does not move every glass. */
const OUTDOOR_AVERAGING_S = 1800

/** The board of a building at `nowS`, from its plan and the readings of its lead sensors. Pure. */
export function boardOf(plan: BoardPlan, series: Known, nowS: number): Board {
  const { building } = plan
  const dayStartS = localDayBounds(localDate(nowS, building.timeZone), building.timeZone).startS
  const outdoor = outdoorNow(plan, series, nowS)
  let lastReadingS: number | null = null
  const rooms = plan.rooms.map((room): RoomTile => {
    const sensor = plan.sensors.find(({ roomId }) => roomId === room.id)
    const readings = sensor ? corrected(plan, sensor, series) : []
    const newestS = readings[readings.length - 1]?.timeS
    if (newestS !== undefined) lastReadingS = Math.max(lastReadingS ?? 0, newestS)
    const limitPpm = limitLevelPpm({ kind: room.limitKind, ppm: room.limitPpm }, outdoor.ppm)
    const verdict = plan.verdicts.find(({ roomId }) => roomId === room.id)
    return {
      id: room.publicId,
      number: room.number,
      name: room.name,
      use: room.use,
      floorId: room.floorId,
      tenancy: room.tenancy,
      singlePerson: room.singlePerson,
      outdoorPpm: outdoor.ppm,
      limitPpm,
      live: sensor
        ? roomState({ nowS, readings, outdoorPpm: outdoor.ppm, limitPpm, sensor, dayStartS })
        : null,
      hidden: false,
      suspectReason: sensor?.suspectReason ?? null,
      verdict: verdict?.verdict ?? null,
      supportsPersons: verdict?.supportsPersons ?? null,
      designHeadcount: verdict?.designHeadcount ?? null,
    }
  })
  const { slug, name, timeZone } = building
  return {
    building: { slug, name, timeZone },
    atS: nowS,
    outdoor,
    lastReadingS,
    floors: floorsOf(plan, nowS),
    rooms,
  }
}

/** A sensor's readings with the offsets that a fresh-air check found; the raw ones stay as they are. */
function corrected(plan: BoardPlan, sensor: BoardSensor, series: Known): readonly LiveReading[] {
  const { lastS, lastPpm } = sensor
  const earlier = lastS === null || lastPpm === null ? [] : [{ timeS: lastS, co2Ppm: lastPpm }]
  const today = series.get(sensor.sensorId) ?? []
  const readings = today.length > 0 ? today : earlier
  const offsets = plan.offsets.filter(({ sensorId }) => sensorId === sensor.sensorId)
  if (offsets.length === 0) return readings
  return readings.map(({ timeS, co2Ppm }) => {
    const offset = offsets.findLast(({ fromS }) => fromS <= timeS)
    return { timeS, co2Ppm: co2Ppm + (offset?.offsetPpm ?? 0) }
  })
}

/** The outdoor sensor's mean of the last half hour, else the building's default. */
function outdoorNow(plan: BoardPlan, series: Known, nowS: number): Board['outdoor'] {
  for (const sensor of plan.sensors.filter(({ roomId }) => roomId === null)) {
    const readings = corrected(plan, sensor, series)
    const newest = readings[readings.length - 1]
    if (sensor.suspectSinceS !== null || !newest || nowS - newest.timeS > silentAfterS(sensor.intervalS))
      continue
    const recent = readings.filter(({ timeS }) => timeS > newest.timeS - OUTDOOR_AVERAGING_S)
    const mean = recent.reduce((sum, { co2Ppm }) => sum + co2Ppm, 0) / recent.length
    // whole ppm, so that the limit of every room does not creep at each reading
    return { ppm: Math.round(mean), measured: true }
  }
  return { ppm: plan.building.outdoorDefaultPpm, measured: false }
}

/** How far back the schedule is followed to find since when the supply has been on or off. */
const SCHEDULE_BACK_S = 8 * 86_400

/** Floors with the supply that their air handlers agree on; where they differ, or nothing is known, nothing is said. */
function floorsOf(plan: BoardPlan, nowS: number): BoardFloor[] {
  return plan.floors
    .filter((floor) => plan.rooms.some(({ floorId }) => floorId === floor.id))
    .map((floor) => {
      const own = plan.rooms.filter(
        ({ floorId, airHandlerId }) => floorId === floor.id && airHandlerId !== null,
      )
      const supplies = [...new Set(own.map((room) => room.airHandlerId ?? 0))].map((id) =>
        supplyOf(plan, id, nowS),
      )
      const first = supplies[0]
      const agree = first && supplies.every((supply) => supply?.state === first.state)
      return { ...floor, supply: agree ? latest(supplies) : null }
    })
}

type Supply = NonNullable<BoardFloor['supply']>

const latest = (supplies: readonly (Supply | null)[]): Supply | null =>
  supplies.reduce((a, b) => (a && b && b.sinceS > a.sinceS ? b : a), supplies[0] ?? null)

/** An air handler's supply now: by its status signal, else by its weekly hours. */
function supplyOf(plan: BoardPlan, airHandlerId: number, nowS: number): Supply | null {
  const status = plan.supply.find((each) => each.airHandlerId === airHandlerId)
  if (status) return { state: status.state, sinceS: status.sinceS, origin: 'status' }
  const hours = plan.supplyHours.filter((each) => each.airHandlerId === airHandlerId)
  if (hours.length === 0) return null
  const record = { states: [], hours, closures: plan.closures }
  const spans = supplySpans(record, nowS - SCHEDULE_BACK_S, nowS, plan.building.timeZone)
  const last = spans[spans.length - 1]
  if (!last) return null
  const on = last.toS >= nowS
  return { state: on ? 'on' : 'off', sinceS: on ? last.fromS : last.toS, origin: 'schedule' }
}

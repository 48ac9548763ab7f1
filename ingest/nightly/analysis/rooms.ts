import type { BuildingPlan, PlanDesign, PlanRoom } from '@/db/queries/building-plan'
import type { RoomSpec, SensorSpec, SupplyHours } from '@/lib/air/types'
import { addDays, isoWeekday } from '@/lib/time'

/** The design of a room that holds on a date; a room without one that early is taken by its first. */
export function designOn(plan: BuildingPlan, roomId: number, date: string): PlanDesign | undefined {
  const own = plan.designs.filter((design) => design.roomId === roomId)
  return own.findLast((design) => design.validFrom <= date) ?? own[0]
}

/** The air system that a room's figures are read by: its own, else its air handler's. */
export function airSystemOf(plan: BuildingPlan, room: PlanRoom) {
  const handler = plan.airHandlers.find((one) => one.id === room.airHandlerId)
  return room.airSystem ?? handler?.airSystem ?? 'unknown'
}

/** True where the building is shut on the date. */
export function isClosed(plan: BuildingPlan, date: string): boolean {
  return plan.closures.some((closure) => closure.fromDate <= date && date <= closure.toDate)
}

/** Scheduled supply of an air handler around a date, without the weekdays that are closed then; undefined where no hours are entered. */
export function supplyHoursAround(
  plan: BuildingPlan,
  airHandlerId: number | null,
  date: string,
): SupplyHours[] | undefined {
  const own = plan.hours.filter((row) => row.purpose === 'supply' && row.airHandlerId === airHandlerId)
  if (airHandlerId === null || own.length === 0) return undefined
  const shut = [-1, 0, 1, 2]
    .map((days) => addDays(date, days))
    .filter((day) => isClosed(plan, day))
    .map(isoWeekday)
  return own.map((row) => ({
    days: row.days.filter((day) => !shut.includes(day)),
    from: row.fromLocal,
    to: row.toLocal,
  }))
}

/** What a sensor says of itself; what it does not say is left out, so that the science's defaults hold. */
export function sensorSpecOf(sensor: BuildingPlan['sensors'][number]): SensorSpec {
  return withoutNulls({
    accuracyPpm: sensor.accuracyPpm,
    accuracyPct: sensor.accuracyPct,
    resolutionPpm: sensor.resolutionPpm,
    rangeMaxPpm: sensor.rangeMaxPpm,
    reporting: sensor.reporting,
    deadbandPpm: sensor.deadbandPpm,
  })
}

/** One room as the science takes it on a date, or undefined while nothing is entered about its size. Ids are database ids as text. */
export function roomSpecOf(
  plan: BuildingPlan,
  room: PlanRoom,
  sensorId: number,
  date: string,
): RoomSpec | undefined {
  const design = designOn(plan, room.id, date)
  if (!design) return undefined
  const sensor = plan.sensors.find((one) => one.id === sensorId)
  return withoutNulls({
    id: String(room.id),
    volumeM3: design.volumeM3,
    floorAreaM2: design.floorAreaM2,
    personsMax: design.permittedOccupancy,
    altitudeM: plan.building.altitudeM,
    neighbour: room.neighbourRoomId === null ? null : String(room.neighbourRoomId),
    airHandler: room.airHandlerId === null ? null : String(room.airHandlerId),
    air: airSystemOf(plan, room),
    supplyHours: supplyHoursAround(plan, room.airHandlerId, date),
    sensor: sensor ? sensorSpecOf(sensor) : undefined,
  }) as RoomSpec
}

type WithoutNulls<T> = { [K in keyof T]?: Exclude<T[K], null | undefined> }

function withoutNulls<T extends object>(given: T): WithoutNulls<T> {
  return Object.fromEntries(
    Object.entries(given).filter(([, value]) => value !== null && value !== undefined),
  ) as WithoutNulls<T>
}

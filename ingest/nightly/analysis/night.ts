import type { FoundDecay, NightResult } from '@/db/changes/nights'
import type { Carried } from '@/db/queries/nights'
import {
  analyseBuildingDay,
  type BuildingDay,
  demandControlledCount,
  type RoomDay,
  sureRates,
} from '@/lib/air/analyse-building'
import { DEFAULT_OUTDOOR } from '@/lib/air/constants'
import { dayFacts, outdoorLevelOf } from './day-facts'
import { type AnalysedSensor, type NightMaterial, nightInputs } from './inputs'

export type AnalysedNight = Pick<NightResult, 'inputHash' | 'found' | 'carried' | 'roomsAnalysed'>

type Pair = { sensor: AnalysedSensor; result: RoomDay }

function daysOf(day: BuildingDay, sensors: readonly AnalysedSensor[]): NonNullable<Carried['days']> {
  const { dayStartS, dayEndS } = day
  const outdoorPpm = outdoorLevelOf(day.outdoor, day.defaultOutdoor?.ppm ?? DEFAULT_OUTDOOR.ppm)
  const days: NonNullable<Carried['days']> = {}
  sensors.forEach((sensor, i) => {
    if (!sensor.lead || !sensor.stores) return
    const { series } = day.rooms[i] as BuildingDay['rooms'][number]
    days[sensor.roomId] = dayFacts({ ...sensor, series, dayStartS, dayEndS, outdoorPpm })
  })
  return days
}

function carriedOf(pairs: readonly Pair[], { plan, window }: NightMaterial): Omit<Carried, 'days'> {
  const sureOnes: NonNullable<Carried['sureRates']> = {}
  const demandControlled: NonNullable<Carried['demandControlled']> = {}
  const quietFloors: NonNullable<Carried['quietFloors']> = {}
  const supplyStops: NonNullable<Carried['supplyStops']> = {}
  const notes: NonNullable<Carried['notes']> = []
  for (const { sensor, result } of pairs) {
    if (result.quietFloor) quietFloors[sensor.sensorId] = result.quietFloor
    const rates = sureRates(result)
    if (rates.length > 0) sureOnes[sensor.sensorId] = rates
    const demand = demandControlledCount(result)
    if (demand > 0) demandControlled[sensor.sensorId] = demand
    const handler = plan.rooms.find((room) => room.id === sensor.roomId)?.airHandlerId
    if (handler && result.supplyStops.length > 0)
      supplyStops[handler] = result.supplyStops.map((stop) => ({
        ...stop,
        clockS: stop.atS - window.dayStartS,
      }))
    notes.push(...result.notes.map((note) => ({ roomId: sensor.roomId, sensorId: sensor.sensorId, ...note })))
  }
  return { quietFloors, sureRates: sureOnes, demandControlled, supplyStops, notes }
}

/** Analyses one night, or gives only the inputs' hash where it is the known one: nothing new to be found. */
export function analyseNight(
  material: NightMaterial,
  knownHash: string | null,
): AnalysedNight | { inputHash: string } {
  const { day, sensors, inputHash } = nightInputs(material)
  if (inputHash === knownHash) return { inputHash }
  const results = analyseBuildingDay(day)
  if (results.length !== sensors.length)
    throw new Error(`the analysis of ${day.date} answered for ${results.length} of ${sensors.length} sensors`)
  const pairs = results.map((result, i) => ({ sensor: sensors[i] as AnalysedSensor, result }))
  const found: FoundDecay[] = pairs
    .filter(({ sensor }) => sensor.stores)
    .flatMap(({ sensor, result }) =>
      result.decays.map((decay) => ({
        roomId: sensor.roomId,
        sensorId: sensor.sensorId,
        lead: sensor.lead,
        decay,
      })),
    )
  const rooms = new Set(sensors.filter((sensor) => sensor.stores).map((sensor) => sensor.roomId))
  return {
    inputHash,
    found,
    carried: { ...carriedOf(pairs, material), days: daysOf(day, sensors) },
    roomsAnalysed: rooms.size,
  }
}

import { createHash } from 'node:crypto'
import { canonicalJson } from '@/db/canonical-json'
import type { BuildingPlan, PlanPlacement } from '@/db/queries/building-plan'
import type { NightRun } from '@/db/queries/nights'
import { sliceSeries } from '@/db/queries/series'
import type { BuildingDay, BuildingRoom, RoomHistory } from '@/lib/air/analyse-building'
import type { Series, SupplyChange } from '@/lib/air/types'
import { addDays } from '@/lib/time'
import { occupiedPeriods, type Period } from './occupied'
import { withOffsets } from './offsets'
import { roomSpecOf } from './rooms'
import type { NightWindow } from './window'

/** Nights whose quiet floors, sure rates and supply stops are handed to a later one, and the most rates. */
export const CARRIED_NIGHTS = 14
const CARRIED_RATES = 12

export type SupplyRow = {
  airHandlerId: number
  at: Date
  state: SupplyChange['state']
  outdoorFraction: number | null
}

/** One room's sensor among the inputs, and where its decays are to be stored; a corridor's are not. */
export type AnalysedSensor = {
  roomId: number
  sensorId: number
  lead: boolean
  stores: boolean
  intervalS: number
  limit: { kind: 'above outdoor' | 'absolute'; ppm: number }
  occupied: Period[]
}

export type NightInputs = { day: BuildingDay; sensors: AnalysedSensor[]; inputHash: string }

export type NightMaterial = {
  plan: BuildingPlan
  window: NightWindow
  /** raw records by sensor, covering at least the window */
  records: ReadonlyMap<number, Series>
  supply: readonly SupplyRow[]
  /** finished runs of the nights before, in order of date */
  before: readonly NightRun[]
  methodVersion: string
}

const measuring = new Set<PlanPlacement['position']>(['room', 'corridor'])

/** The part of a sensor's record that its placement covers in the window, with the offsets of fresh-air checks applied. */
function placedSeries({ plan, window, records }: NightMaterial, placement: PlanPlacement): Series {
  const fromS = Math.max(window.readFromS, placement.fromAt.getTime() / 1000)
  const toS = Math.min(window.readToS, (placement.toAt?.getTime() ?? Number.POSITIVE_INFINITY) / 1000)
  const record = records.get(placement.sensorId)
  if (!record || toS <= fromS) return { timeS: new Float64Array(0), co2Ppm: new Float64Array(0) }
  const offsets = plan.offsets.filter((offset) => offset.sensorId === placement.sensorId)
  return withOffsets(sliceSeries(record, fromS, toS), offsets)
}

function historyOf(
  { before, window }: NightMaterial,
  sensorId: number,
  airHandlerId: number | null,
): RoomHistory {
  const since = addDays(window.date, -CARRIED_NIGHTS)
  const nights = before.filter((run) => run.localDate >= since && run.localDate < window.date)
  return {
    quietFloors: nights.flatMap((run) => run.carried.quietFloors?.[sensorId] ?? []),
    recentRates: nights.flatMap((run) => run.carried.sureRates?.[sensorId] ?? []).slice(-CARRIED_RATES),
    demandControlled: nights.reduce((sum, run) => sum + (run.carried.demandControlled?.[sensorId] ?? 0), 0),
    supplyStops: nights.flatMap((run) =>
      (run.carried.supplyStops?.[airHandlerId ?? ''] ?? []).map((stop) => ({
        date: run.localDate,
        clockS: stop.clockS,
        to: stop.to,
      })),
    ),
  }
}

function supplyOf(rows: readonly SupplyRow[], airHandlerId: number | null): SupplyChange[] {
  return rows
    .filter((row) => row.airHandlerId === airHandlerId)
    .map((row) => ({
      timeS: row.at.getTime() / 1000,
      state: row.state,
      ...(row.outdoorFraction === null ? {} : { outdoorFraction: row.outdoorFraction }),
    }))
}

function outdoorSeries(material: NightMaterial): Series | undefined {
  return material.plan.placements
    .filter((placement) => placement.position === 'outdoor')
    .map((placement) => placedSeries(material, placement))
    .find((series) => series.timeS.length > 0)
}

/** Order matters for the hash and for nothing else: lists come from the plan in order of id. */
function hashOf(methodVersion: string, day: BuildingDay, sensors: readonly AnalysedSensor[]): string {
  const hash = createHash('sha256')
  const addSeries = (series: Series | undefined) => {
    hash.update(`${series?.timeS.length ?? 'none'};`)
    if (!series) return
    for (const part of [series.timeS, series.co2Ppm])
      hash.update(new Uint8Array(part.buffer, part.byteOffset, part.byteLength))
  }
  const { rooms, outdoor, ...rest } = day
  hash.update(canonicalJson({ methodVersion, sensors, ...rest }))
  for (const { series, ...room } of rooms) {
    hash.update(canonicalJson(room))
    addSeries(series)
  }
  addSeries(outdoor)
  return hash.digest('hex').slice(0, 32)
}

/** Everything that the analysis of one night is given, and the hash that says whether it was given the same before. Rooms without a single reading are left out. */
export function nightInputs(material: NightMaterial): NightInputs {
  const { plan, window, methodVersion } = material
  const rooms: BuildingRoom[] = []
  const sensors: AnalysedSensor[] = []
  for (const placement of plan.placements) {
    const room = plan.rooms.find((one) => one.id === placement.roomId)
    if (!room || !measuring.has(placement.position)) continue
    const spec = roomSpecOf(plan, room, placement.sensorId, window.date)
    const series = placedSeries(material, placement)
    if (!spec || series.timeS.length === 0) continue
    rooms.push({
      room: spec,
      sensorId: String(placement.sensorId),
      series,
      supply: supplyOf(material.supply, room.airHandlerId),
      history: historyOf(material, placement.sensorId, room.airHandlerId),
    })
    sensors.push({
      roomId: room.id,
      sensorId: placement.sensorId,
      lead: placement.lead,
      stores: room.kind === 'room',
      intervalS: plan.sensors.find((sensor) => sensor.id === placement.sensorId)?.intervalS ?? 60,
      limit: { kind: room.limitKind, ppm: room.limitPpm },
      occupied: occupiedPeriods(plan, room.id, window.date, window.dayStartS),
    })
  }
  const outdoor = outdoorSeries(material)
  const day: BuildingDay = {
    timeZone: plan.building.timeZone,
    date: window.date,
    dayStartS: window.dayStartS,
    dayEndS: window.dayEndS,
    rooms,
    ...(outdoor ? { outdoor } : {}),
    defaultOutdoor: {
      ppm: plan.building.outdoorDefaultPpm,
      standardUncertaintyPpm: plan.building.outdoorDefaultUncertaintyPpm,
    },
  }
  return { day, sensors, inputHash: hashOf(methodVersion, day, sensors) }
}

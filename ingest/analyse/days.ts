/** Runs the analysis over every local day of a spilled record: first each night's floor, then each day's decays. */
import {
  analyseBuildingDay,
  demandControlledCount,
  nightFloor,
  type RoomHistory,
  sureRates,
} from '@/lib/air/analyse-building'
import type { QuietFloor } from '@/lib/air/decay/floor'
import type { SupplyStop } from '@/lib/air/decay/modes'
import type { Series } from '@/lib/air/types'
import { addDays, localDate, localDayBounds } from '@/lib/time'
import { decayRecord } from './output'
import type { RoomsFile } from './rooms-file'
import type { Spill } from './spill'

/** nights on either side whose floors a day may lean on */
const FLOOR_NIGHTS = 10
/** nights back whose demand-controlled decays a room is known by */
const DEMAND_NIGHTS = 14
/** the series index of the outdoor sensor */
export const OUTDOOR_INDEX = -1

function* localDays(
  spill: Spill,
  timeZone: string,
): Generator<{ date: string; startS: number; endS: number }> {
  if (!Number.isFinite(spill.firstS)) return
  const last = localDate(spill.lastS, timeZone)
  for (let date = localDate(spill.firstS, timeZone); date <= last; date = addDays(date, 1)) {
    const bounds = localDayBounds(date, timeZone)
    if (spill.mayHold(bounds.startS - 7200, bounds.endS + 43_200)) yield { date, ...bounds }
  }
}

const window = (spill: Spill, index: number, day: { startS: number; endS: number }): Series =>
  spill.read(index, day.startS - 7200, day.endS + 43_200)

type Stops = { date: string; clockS: number; to: SupplyStop['to'] }[]

/** All floors first: a night may be judged by the nights after it as well as by those before. */
function collectFloors(file: RoomsFile, spill: Spill): QuietFloor[][] {
  const floors: QuietFloor[][] = file.rooms.map(() => [])
  for (const day of localDays(spill, file.timeZone)) {
    file.rooms.forEach((room, index) => {
      const floor = nightFloor(
        { room, series: window(spill, index, day) },
        { ...day, dayStartS: day.startS, dayEndS: day.endS },
      )
      if (floor) floors[index]!.push(floor)
    })
  }
  return floors
}

/** Analyses every day; returns each decay as a line of JSON, by room, then start. */
export function analyseDays(file: RoomsFile, spill: Spill, hasOutdoor: boolean): string[] {
  const floors = collectFloors(file, spill)
  const lines: string[][] = file.rooms.map(() => [])
  const demands: number[][] = file.rooms.map(() => [])
  const rates: number[][] = file.rooms.map(() => [])
  const stops = new Map<string, Stops>()
  for (const day of localDays(spill, file.timeZone)) {
    const rooms = file.rooms.map((room, index) => {
      const near = (floor: QuietFloor) => Math.abs(floor.atS - day.startS) < FLOOR_NIGHTS * 86_400
      const history: RoomHistory = {
        quietFloors: floors[index]!.filter(near),
        recentRates: rates[index]!.slice(-12),
        demandControlled: demands[index]!.slice(-DEMAND_NIGHTS).reduce((sum, count) => sum + count, 0),
      }
      if (room.airHandler !== undefined) history.supplyStops = (stops.get(room.airHandler) ?? []).slice(-14)
      return { room, series: window(spill, index, day), history }
    })
    const outdoor = hasOutdoor ? window(spill, OUTDOOR_INDEX, day) : undefined
    const { timeZone } = file
    const result = analyseBuildingDay({
      timeZone,
      date: day.date,
      dayStartS: day.startS,
      dayEndS: day.endS,
      rooms,
      outdoor,
    })
    result.forEach((roomDay, index) => {
      for (const decay of roomDay.decays) lines[index]!.push(JSON.stringify(decayRecord(decay)))
      rates[index]!.push(...sureRates(roomDay))
      demands[index]!.push(demandControlledCount(roomDay))
      const handler = file.rooms[index]!.airHandler
      if (handler === undefined) return
      const kept = stops.get(handler) ?? []
      stops.set(handler, kept)
      for (const stop of roomDay.supplyStops) {
        const entry = { date: day.date, clockS: stop.atS - day.startS, to: stop.to }
        if (!kept.some((seen) => seen.date === entry.date && seen.clockS === entry.clockS)) kept.push(entry)
      }
    })
  }
  const order = file.rooms
    .map((room, index) => ({ id: room.id, index }))
    .sort((a, b) => (a.id < b.id ? -1 : 1))
  return order.flatMap(({ index }) => lines[index]!)
}

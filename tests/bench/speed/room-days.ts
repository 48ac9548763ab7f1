import { analyseBuildingDay, type BuildingDay } from '@/lib/air/analyse-building'
import { refitDecay } from '@/lib/air/decay/refit'
import type { Series } from '@/lib/air/types'
import { makeBuilding, type TruthRoom } from '../../support/truth/building'
import { addDays, localTimeS } from '../../support/truth/calendar'
import type { Reading } from '../../support/truth/sensor'

/** The mixture that a building is made of: mostly ordinary evenings, some hard ones. */
const MIXTURE = [
  'clean',
  'clean',
  'cleaners',
  'shut-off',
  'drift',
  'outages',
  'weekend',
  'demand',
  'never-empty',
  'noisy',
]

function seriesOf(readings: readonly Reading[], fromS: number, toS: number): Series {
  const inside = readings
    .filter((r) => r.clockS >= fromS && r.clockS <= toS)
    .sort((a, b) => a.clockS - b.clockS)
  const single = inside.filter((r, i) => i === 0 || r.clockS > inside[i - 1]!.clockS)
  return {
    timeS: Float64Array.from(single, (r) => r.clockS),
    co2Ppm: Float64Array.from(single, (r) => r.ppm),
  }
}

function dayOf(zone: string, date: string, room: TruthRoom): BuildingDay {
  const dayStartS = localTimeS(zone, date, 0)
  const dayEndS = localTimeS(zone, addDays(date, 1), 0)
  const series = seriesOf(room.readings, dayStartS - 7200, dayEndS + 12 * 3600)
  const spec = { id: room.id, volumeM3: room.entry.volume_m3 as number }
  return { timeZone: zone, date, dayStartS, dayEndS, rooms: [{ room: spec, series }] }
}

/** Room-days at one-minute steps, each with the 38 hours that its night needs; the same for the same seed. */
export function oneMinuteRoomDays(seed: number, roomsPerClass: number, days: number): BuildingDay[] {
  const all: BuildingDay[] = []
  for (const [part, className] of MIXTURE.entries()) {
    const building = makeBuilding({ className, seed, part, rooms: roomsPerClass * 3, days, outdoor: false })
    const minutely = building.rooms
      .filter((room) => room.draft.sensor.intervalS === 60)
      .slice(0, roomsPerClass)
    for (const room of minutely) for (const date of building.dates) all.push(dayOf(building.zone, date, room))
  }
  return all
}

/** CPU milliseconds (user and system) of one room-day's whole analysis. */
export function cpuMsOf(day: BuildingDay): number {
  const before = process.cpuUsage()
  analyseBuildingDay(day)
  const used = process.cpuUsage(before)
  return (used.user + used.system) / 1000
}

export type Bulk = { roomDays: number; seconds: number; cpuSeconds: number; decays: number; peakMb: number }

/** Analyses so many room-days one after the other, drawing on the given ones in turn, and watches the memory. */
export function bulk(days: readonly BuildingDay[], roomDays: number): Bulk {
  const startMs = performance.now()
  const before = process.cpuUsage()
  let peak = 0
  let decays = 0
  for (let i = 0; i < roomDays; i++) {
    for (const room of analyseBuildingDay(days[i % days.length]!)) decays += room.decays.length
    if (i % 50 === 0) peak = Math.max(peak, process.memoryUsage().rss)
  }
  const used = process.cpuUsage(before)
  return {
    roomDays,
    seconds: (performance.now() - startMs) / 1000,
    cpuSeconds: (used.user + used.system) / 1e6,
    decays,
    peakMb: peak / 1024 ** 2,
  }
}

/** Milliseconds of each refit while a hand drags a window's start and end over an evening's record of 38 hours. */
export function refitMs(days: readonly BuildingDay[], drags: number): number[] {
  const times: number[] = []
  for (let i = 0; i < drags; i++) {
    const day = days[i % days.length]!
    const fromS = day.dayStartS + 17.5 * 3600 + (i % 40) * 60
    const toS = fromS + (1 + (i % 7) / 2) * 3600
    const startMs = performance.now()
    refitDecay({ series: day.rooms[0]!.series, fromS, toS, background: null })
    times.push(performance.now() - startMs)
  }
  return times
}

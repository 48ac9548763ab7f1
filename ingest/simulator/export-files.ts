import { once } from 'node:events'
import fs from 'node:fs'
import path from 'node:path'
import { writeTruth } from './demo-files'
import { forEachReading, type HistoryBatch, makeHistory } from './history'
import { roomKey } from './keys'
import type { CorridorPlan, RoomPlan, SensorPlan } from './scenario'
import { truthOf } from './truth'
import type { World } from './world'

export type ExportCounts = { rooms: number; readings: number; outdoor: number }

/**
 * Writes rooms.json, readings.csv and outdoor.csv in the shapes that `npm run analyse` reads, and truth.json. Rooms and landings
 * with a wall sensor are in it, each with its lead sensor; ducts and second sensors are not.
 */
export async function exportDemo(world: World, dir: string, untilS: number): Promise<ExportCounts> {
  fs.mkdirSync(dir, { recursive: true })
  const leads = world.scenario.sensors.map((sensor) => leadZone(world, sensor))
  const measured = world.zones.filter((zone) => leads.includes(zone))
  const rooms = measured.map((zone) => roomEntry(world, zone))
  const plan = { time_zone: world.scenario.building.timeZone, rooms }
  fs.writeFileSync(path.join(dir, 'rooms.json'), `${JSON.stringify(plan, null, 2)}\n`)

  const readings = fs.createWriteStream(path.join(dir, 'readings.csv'))
  const outdoor = fs.createWriteStream(path.join(dir, 'outdoor.csv'))
  readings.write('room,timestamp,co2_ppm\n')
  outdoor.write('timestamp,co2_ppm\n')
  const counts = { rooms: rooms.length, readings: 0, outdoor: 0 }
  const names = leads.map((zone) => (zone ? roomKey(zone) : null))
  for (const batch of makeHistory(world, { toS: untilS, batchMinutes: 360 })) {
    const [indoorRows, outdoorRows] = rowsOf(world, batch, names)
    counts.readings += indoorRows.length
    counts.outdoor += outdoorRows.length
    if (!outdoor.write(outdoorRows.join(''))) await once(outdoor, 'drain')
    if (!readings.write(indoorRows.join(''))) await once(readings, 'drain')
  }
  await Promise.all([readings, outdoor].map((file) => once(file.end(), 'finish')))
  writeTruth(path.join(dir, 'truth.json'), truthOf(world, world.historyStartS, untilS))
  return counts
}

function leadZone(world: World, sensor: SensorPlan): RoomPlan | CorridorPlan | undefined {
  return sensor.lead ? world.zones.find((zone) => zone.number === sensor.place) : undefined
}

function rowsOf(
  world: World,
  batch: HistoryBatch,
  names: readonly (string | null)[],
): [indoor: string[], outdoor: string[]] {
  const indoor: string[] = []
  const outdoor: string[] = []
  forEachReading(batch, (s, timeS, co2Ppm) => {
    const name = names[s]
    const stamp = () => new Date(timeS * 1000).toISOString().replace('.000Z', 'Z')
    if (name) indoor.push(`${name},${stamp()},${co2Ppm}\n`)
    else if (world.scenario.sensors[s]!.position === 'outdoor') outdoor.push(`${stamp()},${co2Ppm}\n`)
  })
  return [indoor, outdoor]
}

function roomEntry(world: World, zone: RoomPlan | CorridorPlan): Record<string, unknown> {
  const { scenario, story, corridorOfFloor, zones } = world
  const handler = scenario.airHandlers.find((h) => h.code === zone.airHandler)
  const sensor = scenario.sensors.find((s) => s.lead && s.place === zone.number)!
  const room = 'activity' in zone ? zone : null
  const landing = zones[corridorOfFloor.get(zone.floor)!]!
  const air = room?.airSystem ?? handler?.airSystem ?? 'unknown'
  return {
    id: roomKey(zone),
    volume_m3: zone.volumeM3,
    floor_area_m2: zone.floorAreaM2,
    ...(room ? { persons_max: room.permittedOccupancy } : {}),
    altitude_m: scenario.building.altitudeM,
    // the plan shows which door stands open, whether or not anyone has looked at the readings
    ...(zone.number === story.openDoor.room ? { neighbour: roomKey(landing) } : {}),
    ...(handler ? { air_handler: handler.code, supply_hours: handler.hours } : {}),
    air,
    sensor: {
      accuracy_ppm: sensor.model.accuracyPpm,
      accuracy_pct: sensor.model.accuracyPct,
      resolution_ppm: sensor.model.resolutionPpm,
      range_max_ppm: sensor.model.rangeMaxPpm,
      reporting: 'interval',
    },
  }
}

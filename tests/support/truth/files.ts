import { mkdirSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import type { TruthBuilding } from './building'
import { isoZ } from './calendar'
import type { Reading } from './sensor'

function rowsOf(id: string, readings: readonly Reading[], rows: string[]) {
  for (const reading of readings) rows.push(`${id},${isoZ(reading.clockS)},${reading.ppm}`)
}

/** Writes what an outsider would hand over: rooms.json, readings.csv and, where there is one, outdoor.csv. */
export function writeBuilding(building: TruthBuilding, folder: string) {
  mkdirSync(folder, { recursive: true })
  const rows = ['room,timestamp,co2_ppm']
  for (const room of building.rooms) rowsOf(room.id, room.readings, rows)
  for (const hall of building.neighbours) rowsOf(hall.id, hall.readings, rows)
  const files = {
    rooms: join(folder, 'rooms.json'),
    readings: join(folder, 'readings.csv'),
    outdoor: building.outdoor ? join(folder, 'outdoor.csv') : null,
    out: join(folder, 'decays.json'),
  }
  const entries = [...building.rooms, ...building.neighbours].map((r) => r.entry)
  writeFileSync(files.rooms, JSON.stringify({ time_zone: building.zone, rooms: entries }, null, 1))
  writeFileSync(files.readings, `${rows.join('\n')}\n`)
  if (files.outdoor && building.outdoor) {
    const lines = building.outdoor.map((r) => `${isoZ(r.clockS)},${r.ppm}`)
    writeFileSync(files.outdoor, `timestamp,co2_ppm\n${lines.join('\n')}\n`)
  }
  return files
}

import { spawn } from 'node:child_process'
import {
  closeSync,
  mkdtempSync,
  openSync,
  readFileSync,
  rmSync,
  statSync,
  writeFileSync,
  writeSync,
} from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { makeBuilding } from '../../support/truth/building'
import { isoZ } from '../../support/truth/calendar'

/** Days of true record that the long one is laid together from, a whole number of weeks. */
const PIECE_DAYS = 7

export type FileRun = { roomDays: number; fileMb: number; seconds: number; decays: number; peakMb: number }

/** Writes one-minute readings of `rooms` rooms over whole weeks, each week the same true record moved on. */
function writeFiles(folder: string, rooms: number, weeks: number) {
  const order = { className: 'clean', seed: 1, part: 0, rooms: 40, days: PIECE_DAYS, outdoor: false }
  const building = makeBuilding(order)
  const minutely = building.rooms.filter((room) => room.draft.sensor.intervalS === 60)
  const file = openSync(join(folder, 'readings.csv'), 'w')
  writeSync(file, 'room,timestamp,co2_ppm\n')
  const spanS = PIECE_DAYS * 86_400
  for (let r = 0; r < rooms; r++) {
    const source = minutely[r % minutely.length]!.readings
    const untilS = source[0]!.clockS + spanS
    for (let week = 0; week < weeks; week++) {
      let text = ''
      for (const { clockS, ppm } of source)
        if (clockS < untilS) text += `room ${r},${isoZ(clockS + week * spanS)},${ppm}\n`
      writeSync(file, text)
    }
  }
  closeSync(file)
  const entries = Array.from({ length: rooms }, (_, r) => ({ id: `room ${r}`, volume_m3: 80 }))
  writeFileSync(join(folder, 'rooms.json'), JSON.stringify({ time_zone: building.zone, rooms: entries }))
}

/** The most memory a process has held so far, MB (Linux: VmHWM); NaN elsewhere. */
function peakMemoryMb(pid: number): number {
  try {
    return Number(/VmHWM:\s+(\d+)/.exec(readFileSync(`/proc/${pid}/status`, 'utf8'))?.[1]) / 1024
  } catch {
    return Number.NaN
  }
}

/** Runs the analyse command on about so many room-days of one-minute readings, in files, and watches its memory. */
export async function analyseFilesAtLength(roomDays: number): Promise<FileRun> {
  const folder = mkdtempSync(join(tmpdir(), 'ebbmark-bench-'))
  const rooms = Math.max(1, Math.round(Math.sqrt(roomDays)))
  const weeks = Math.max(1, Math.round(roomDays / rooms / PIECE_DAYS))
  try {
    writeFiles(folder, rooms, weeks)
    const file = (name: string) => join(folder, name)
    const args = ['--import', 'tsx', 'ingest/analyse/main.ts', '--rooms', file('rooms.json')]
    args.push('--readings', file('readings.csv'), '--out', file('decays.json'))
    const startMs = performance.now()
    const child = spawn(process.execPath, args, { stdio: ['ignore', 'ignore', 'inherit'] })
    let peakMb = 0
    const watch = setInterval(() => {
      peakMb = Math.max(peakMb, peakMemoryMb(child.pid!) || 0)
    }, 100)
    const code = await new Promise<number | null>((done) => child.on('close', done))
    clearInterval(watch)
    if (code !== 0) throw new Error(`analyse ended with ${code}`)
    const decays = (JSON.parse(readFileSync(file('decays.json'), 'utf8')) as unknown[]).length
    const seconds = (performance.now() - startMs) / 1000
    const fileMb = statSync(file('readings.csv')).size / 1024 ** 2
    return { roomDays: rooms * weeks * PIECE_DAYS, fileMb, seconds, decays, peakMb }
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}

/**
 * `npm run analyse`: the science on files, without a database. Reads rooms.json and readings.csv (and outdoor.csv), writes the decays as JSON;
 * or one planned tracer test. Exit 0 with a result; 2 with one line on standard error per problem.
 */
import { existsSync } from 'node:fs'
import path from 'node:path'
import { analyseDays, OUTDOOR_INDEX } from './days'
import { parseOptions, USAGE } from './options'
import { writeResult } from './output'
import { InputError } from './problems'
import { readRoomsFile } from './rooms-file'
import { parseCo2, readRows } from './rows'
import { Spill } from './spill'
import { parseTimestamp } from './timestamp'

const say = (line: string) => process.stderr.write(`${line}\n`)
const TIME_EXPECTED = 'expected timestamp in ISO 8601 with offset or Z'

async function readReadings(file: string, ids: ReadonlyMap<string, number>, spill: Spill): Promise<void> {
  await readRows(
    file,
    ['room', 'timestamp', 'co2_ppm'],
    ([room, timestamp, co2]) => {
      const index = ids.get(room ?? '') ?? ids.get((room ?? '').trim())
      if (index === undefined) return `expected a room of rooms.json, not "${(room ?? '').slice(0, 40)}"`
      return addReading(spill, index, timestamp, co2)
    },
    say,
  )
}

function addReading(
  spill: Spill,
  index: number,
  timestamp: string | undefined,
  co2: string | undefined,
): string | null {
  const timeS = parseTimestamp((timestamp ?? '').trim())
  if (Number.isNaN(timeS)) return `${TIME_EXPECTED}, not "${(timestamp ?? '').slice(0, 40)}"`
  const value = parseCo2(co2)
  if (typeof value === 'string') return value
  spill.add(index, timeS, value)
  return null
}

async function analyseFiles(options: {
  rooms: string
  readings: string
  outdoor?: string
  out?: string
}): Promise<void> {
  const rooms = readRoomsFile(options.rooms)
  const spill = new Spill()
  try {
    const ids = new Map(rooms.rooms.map((room, index) => [room.id, index]))
    await readReadings(options.readings, ids, spill)
    if (options.outdoor !== undefined) {
      await readRows(
        options.outdoor,
        ['timestamp', 'co2_ppm'],
        ([t, co2]) => addReading(spill, OUTDOOR_INDEX, t, co2),
        say,
      )
    }
    const lines = analyseDays(rooms, spill, options.outdoor !== undefined)
    await writeResult(lines, options.out)
  } finally {
    spill.close()
  }
}

async function runTracerFile(file: string): Promise<number> {
  const { runTracer } = (await import('./tracer')) as { runTracer: (path: string) => Promise<number> }
  return runTracer(file)
}

async function main(words: readonly string[]): Promise<number> {
  const options = parseOptions(words)
  if (options.kind === 'help') {
    process.stdout.write(`${USAGE}\n`)
    return 0
  }
  if (options.kind === 'tracer') return runTracerFile(options.tracer)
  if (options.out !== undefined && !existsSync(path.dirname(path.resolve(options.out)))) {
    throw new InputError([`${options.out}: cannot be written: expected a path in a folder that exists`])
  }
  await analyseFiles(options)
  return 0
}

try {
  process.exitCode = await main(process.argv.slice(2))
} catch (error) {
  if (error instanceof InputError) for (const problem of error.problems) say(problem)
  else say(`${error instanceof Error ? error.message : String(error)}\n${USAGE}`)
  process.exitCode = 2
}

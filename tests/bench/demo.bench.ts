/** The demo building's export through the analyse command, held against the truth that the simulator kept. */
import { spawnSync } from 'node:child_process'
import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { options, percent, printTable, wholeNumber, writeReport } from './report'

type Answer = {
  room: string
  start: string
  end: string
  kind: string
  ach: number | null
  ach_low: number | null
  ach_high: number | null
  quality: string
  reasons: string[]
}
type Interval = { from: string; to: string }
type TrueRoom = {
  id: string
  name: string
  air_change: (Interval & { outdoor_ach: number; total_ach: number })[]
  occupancy: (Interval & Record<string, unknown>)[]
}
type Scored = {
  room: string
  accepted: boolean
  error: number
  holds: boolean
  halfWidth: number
  falseAccept: boolean
}

const chosen = options({ weeks: '8', seed: '1' })
const folder = mkdtempSync(join(tmpdir(), 'ebbmark-demo-'))
const node = (...args: string[]) => {
  const done = spawnSync(process.execPath, ['--import', 'tsx', ...args], {
    stdio: ['ignore', 'inherit', 'inherit'],
  })
  if (done.status !== 0) process.exit(done.status ?? 1)
}
const at = (name: string) => join(folder, name)
node(
  'ingest/simulator/export.ts',
  '--out',
  folder,
  '--weeks',
  String(wholeNumber('weeks', chosen.weeks, 1)),
  '--seed',
  String(wholeNumber('seed', chosen.seed, 0)),
)
node(
  'ingest/analyse/main.ts',
  '--rooms',
  at('rooms.json'),
  '--readings',
  at('readings.csv'),
  '--outdoor',
  at('outdoor.csv'),
  '--out',
  at('decays.json'),
)

const read = <T>(name: string) => JSON.parse(readFileSync(at(name), 'utf8')) as T
const truth = new Map(read<{ rooms: TrueRoom[] }>('truth.json').rooms.map((room) => [room.id, room]))
const answers = read<Answer[]>('decays.json')
const given = answers.filter(
  (answer) => answer.kind === 'fit' && answer.ach !== null && answer.quality !== 'refused',
)
const scored = given.flatMap((answer) => score(answer, truth.get(answer.room)))
rmSync(folder, { recursive: true, force: true })

/** Seconds that two spans share. */
function shared(a: Interval, fromMs: number, toMs: number): number {
  return Math.max(0, Math.min(Date.parse(a.to), toMs) - Math.max(Date.parse(a.from), fromMs)) / 1000
}

/** Error against the nearer of the true outdoor and total rates, time-weighted over the window that the answer names. */
function score(answer: Answer, room: TrueRoom | undefined): Scored[] {
  if (!room || answer.ach === null || answer.ach_low === null || answer.ach_high === null) return []
  const [fromMs, toMs] = [Date.parse(answer.start), Date.parse(answer.end)]
  const parts = room.air_change
    .map((part) => ({ part, s: shared(part, fromMs, toMs) }))
    .filter(({ s }) => s > 0)
  const whole = parts.reduce((sum, { s }) => sum + s, 0)
  if (whole === 0) return []
  const mean = (of: 'outdoor_ach' | 'total_ach') =>
    parts.reduce((sum, { part, s }) => sum + part[of] * s, 0) / whole
  const [low, high] = [mean('outdoor_ach'), mean('total_ach')].sort((a, b) => a - b) as [number, number]
  const target = Math.min(high, Math.max(low, answer.ach))
  const error = Math.abs(answer.ach / target - 1)
  const peopleS = room.occupancy.reduce((sum, stay) => sum + shared(stay, fromMs, toMs), 0)
  const main = Math.max(...parts.map(({ s }) => s)) / whole
  const mixed =
    main < 0.9 &&
    Math.max(...parts.map(({ part }) => part.total_ach)) >
      1.2 * Math.min(...parts.map(({ part }) => part.total_ach))
  const accepted = answer.quality === 'accepted'
  return [
    {
      room: room.name,
      accepted,
      error,
      holds: answer.ach_low <= high && answer.ach_high >= low,
      halfWidth: (answer.ach_high - answer.ach_low) / (2 * answer.ach),
      falseAccept: accepted && (peopleS > 120 || mixed) && error > 0.2,
    },
  ]
}

const middle = (values: number[]) => values.sort((a, b) => a - b)[Math.floor(values.length / 2)] ?? Number.NaN
function summary(name: string, rows: readonly Scored[]) {
  const sound = rows.filter((row) => !row.falseAccept)
  return {
    name,
    figures: rows.length,
    medianError: middle(rows.map((row) => row.error)),
    coverage: rows.filter((row) => row.holds).length / rows.length,
    coverageWithoutFalse: sound.filter((row) => row.holds).length / sound.length,
    halfWidth: middle(rows.map((row) => row.halfWidth)),
    falseAccepts: rows.filter((row) => row.falseAccept).length / rows.length,
  }
}

const accepted = scored.filter((row) => row.accepted)
const rooms = [...new Set(accepted.map((row) => row.room))].sort()
const lines = [
  summary('accepted, all rooms', accepted),
  summary(
    'doubtful, all rooms',
    scored.filter((row) => !row.accepted),
  ),
  ...rooms.map((room) =>
    summary(
      room,
      accepted.filter((row) => row.room === room),
    ),
  ),
]
printTable(
  ['', 'figures', 'median error %', 'coverage %', '± %', 'false accepts %'],
  lines.map((line) => [
    line.name,
    String(line.figures),
    percent(line.medianError),
    percent(line.coverage),
    percent(line.halfWidth),
    percent(line.falseAccepts),
  ]),
)
console.log(
  '\nThe true rate lies between outdoor and total (air from neighbouring rooms); coverage counts false accepts too; a false accept has people inside for more than 2 min, or two rates mixed, and is more than 20 % off.',
)
writeReport('demo', { ...chosen, answers: answers.length, lines })

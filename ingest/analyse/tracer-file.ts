/** test.json of `--tracer`, checked field by field with the line named. */
import { readFileSync } from 'node:fs'
import { z } from 'zod'
import type { Sample, TracerTest } from '@/lib/air/age-of-air'
import { lineOfPath, lineOfSyntaxError } from './json-lines'
import { InputError, LISTED_PROBLEMS } from './problems'

const EXPECTED_FILE =
  '{ "kind": "step-up" | "decay", "volume_m3": …, "exhaust": [[t_s, c], …], "points": { … } }'
/** Samples after the step that a record needs at least. */
const LEAST_SAMPLES = 6

const number = (name: string) => z.number(`expected ${name} as a number`)
const positive = (name: string) => number(name).positive(`expected ${name} above 0`)
const record = (name: string) =>
  z.array(z.unknown(), `expected ${name} as a list of [seconds, concentration]`)

const shape = z.object({
  kind: z.enum(['step-up', 'decay'], 'expected kind "step-up" or "decay"'),
  volume_m3: positive('volume_m3'),
  supply_lps: positive('supply_lps').nullish(),
  background: number('background').nullish(),
  initial: number('initial').nullish(),
  steady: number('steady').nullish(),
  exhaust: record('exhaust').nullish(),
  points: z.record(z.string(), record('a point'), 'expected points as an object of records').nullish(),
})

type Path = (string | number)[]
type Problem = { path: Path; message: string }

function readJson(file: string): { text: string; data: unknown } {
  let text: string
  try {
    text = readFileSync(file, 'utf8').replace(/^\uFEFF/, '')
  } catch {
    throw new InputError([`${file}:1: cannot be read: expected a JSON file ${EXPECTED_FILE}`])
  }
  try {
    return { text, data: JSON.parse(text) }
  } catch (error) {
    throw new InputError([
      `${file}:${lineOfSyntaxError(text, error)}: not valid JSON: expected ${EXPECTED_FILE}`,
    ])
  }
}

function isSample(value: unknown): value is [number, number] {
  return Array.isArray(value) && value.length === 2 && value.every((part) => Number.isFinite(part))
}

/** The good samples of one record; the bad ones go on the list, and more than half of them, or too few good ones, refuse the file. */
function samplesOf(values: readonly unknown[], path: Path, bad: Problem[], fatal: Problem[]): Sample[] {
  const good = values.filter(isSample)
  values.forEach((value, i) => {
    if (isSample(value)) return
    const found = JSON.stringify(value)?.slice(0, 40)
    bad.push({ path: [...path, i], message: `expected [seconds, concentration], two numbers, not ${found}` })
  })
  if (values.length - good.length > values.length / 2) {
    fatal.push({
      path,
      message: `${values.length - good.length} of ${values.length} samples are bad, more than half`,
    })
    return []
  }
  const after = new Set(good.filter(([timeS]) => timeS > 0).map(([timeS]) => timeS)).size
  if (after < LEAST_SAMPLES) {
    fatal.push({
      path,
      message: `expected at least ${LEAST_SAMPLES} samples at different times after the step, found ${after}`,
    })
  }
  return good
}

function levelProblems(test: z.infer<typeof shape>): Problem[] {
  const background = test.background ?? 0
  const name = test.kind === 'decay' ? 'initial' : 'steady'
  const level = test[name]
  return typeof level === 'number' && level === background
    ? [{ path: [name], message: `expected ${name} to differ from the background of ${background}` }]
    : []
}

/**
 * Reads and checks one tracer test. Bad samples are said (up to twenty) and left out.
 * @throws InputError with one line per problem: file, line, what was expected
 */
export function readTracerFile(file: string, say: (line: string) => void): TracerTest {
  const { text, data } = readJson(file)
  const at = ({ path, message }: Problem) =>
    `${file}:${lineOfPath(text, path)}: ${path.join('.') || 'the file'}: ${message}`
  const parsed = shape.safeParse(data)
  if (!parsed.success) {
    throw new InputError(
      parsed.error.issues.map((issue) => at({ path: issue.path as Path, message: issue.message })),
    )
  }
  const bad: Problem[] = []
  const fatal = levelProblems(parsed.data)
  const { exhaust, points } = parsed.data
  const records = {
    exhaust: exhaust && exhaust.length > 0 ? samplesOf(exhaust, ['exhaust'], bad, fatal) : null,
    points: Object.fromEntries(
      Object.entries(points ?? {}).map(([name, values]) => [
        name,
        samplesOf(values, ['points', name], bad, fatal),
      ]),
    ),
  }
  if (!records.exhaust && Object.keys(records.points).length === 0) {
    fatal.push({ path: [], message: 'expected a record in "exhaust" or at least one in "points"' })
  }
  for (const problem of bad.slice(0, LISTED_PROBLEMS)) say(at(problem))
  if (bad.length > LISTED_PROBLEMS)
    say(`${file}: ${bad.length - LISTED_PROBLEMS} more bad samples are not listed`)
  if (fatal.length > 0) throw new InputError(fatal.map(at))
  return {
    kind: parsed.data.kind,
    volumeM3: parsed.data.volume_m3,
    supplyLps: parsed.data.supply_lps ?? undefined,
    background: parsed.data.background ?? 0,
    initial: parsed.data.initial ?? undefined,
    steady: parsed.data.steady ?? undefined,
    ...records,
  }
}

import { spawn } from 'node:child_process'
import { options, printTable, wholeNumber, writeReport } from './report'

/** The fault tests of the ingest again and again, each round with a seed of its own: kill -9 of broker, workers, Mosquitto, PostgreSQL. */
const chosen = options({ rounds: '10', seed: '1' })
const rounds = wholeNumber('rounds', chosen.rounds, 1)
const firstSeed = wholeNumber('seed', chosen.seed, 0)
const files = [
  'tests/integration/ingest/kill.test.ts',
  'tests/integration/ingest/outside-broker-kill.test.ts',
]

type Round = { seed: number; file: string; held: boolean; seconds: number; said: string[] }

const done: Round[] = []
for (let seed = firstSeed; seed < firstSeed + rounds; seed++)
  for (const file of files) {
    const round = await run(file, seed)
    done.push(round)
    console.log(`seed ${seed}, ${file}: ${round.held ? 'nothing lost' : 'FAILED'}`)
    for (const line of round.said) console.log(`  ${line}`)
  }
printTable(
  ['', 'rounds', 'held', 'seconds'],
  files.map((file) => {
    const own = done.filter((round) => round.file === file)
    const seconds = own.reduce((sum, round) => sum + round.seconds, 0)
    return [
      file,
      String(own.length),
      String(own.filter(({ held }) => held).length),
      (seconds / own.length).toFixed(0),
    ]
  }),
)
writeReport('kills', { rounds, firstSeed, done })
process.exitCode = done.every(({ held }) => held) ? 0 : 1

/** One test file with one seed; `said` is what it counted. */
async function run(file: string, seed: number): Promise<Round> {
  const startedMs = performance.now()
  const child = spawn(process.execPath, ['node_modules/vitest/vitest.mjs', 'run', file], {
    env: { ...process.env, KILL_SEED: String(seed), NO_COLOR: '1', NODE_ENV: 'test' },
    stdio: ['ignore', 'pipe', 'pipe'],
  })
  let output = ''
  for (const stream of [child.stdout, child.stderr]) stream.on('data', (chunk) => (output += chunk))
  const code = await new Promise<number | null>((resolve) => child.once('exit', resolve))
  const held = code === 0
  if (!held) console.log(output.slice(-4000))
  const said = output.split('\n').filter((line) => /\d+ acknowledged/.test(line))
  return { seed, file, held, seconds: (performance.now() - startedMs) / 1000, said }
}

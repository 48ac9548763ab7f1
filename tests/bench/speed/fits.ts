import { spawnSync } from 'node:child_process'
import { existsSync } from 'node:fs'
import { join } from 'node:path'
import { levenbergMarquardt } from 'ml-levenberg-marquardt'
import { fitPiecewise } from '@/lib/air/decay/piecewise'
import { randomFrom } from '../../support/truth/random'

/** One decay to fit: hours, ppm, and where every program starts from (start excess, rate, background). */
export type Task = { hours: number[]; ppm: number[]; start: [number, number, number] }

export type Contestant = { name: string; fitsPerSecond: number; largestDifference: number; failures: number }

/** Decays of two hours at one-minute steps, three time constants on average, 5 ppm of noise. */
export function makeTasks(seed: number, count: number): Task[] {
  const random = randomFrom(`fits ${seed}`)
  return Array.from({ length: count }, () => {
    const rate = random.uniform(0.8, 2.2)
    const excess = random.uniform(400, 1200)
    const background = random.uniform(410, 450)
    const hours = Array.from({ length: 120 }, (_, i) => i / 60)
    const ppm = hours.map((t) => background + excess * Math.exp(-rate * t) + random.normal(0, 5))
    return { hours, ppm, start: [ppm[0]! - 420, 1.2, 420] }
  })
}

function timed(
  name: string,
  tasks: readonly Task[],
  fit: (task: Task) => number | null,
  reference: number[] | null,
) {
  for (const task of tasks.slice(0, 20)) fit(task)
  const startMs = performance.now()
  const rates = tasks.map((task) => fit(task) ?? Number.NaN)
  const seconds = (performance.now() - startMs) / 1000
  return { rates, contestant: against(name, rates, reference ?? rates, tasks.length / seconds) }
}

function against(
  name: string,
  rates: readonly number[],
  reference: readonly number[],
  fitsPerSecond: number,
): Contestant {
  let largestDifference = 0
  let failures = 0
  for (const [i, rate] of rates.entries()) {
    const difference = Math.abs(rate / reference[i]! - 1)
    if (!(difference < 0.05)) failures++
    else largestDifference = Math.max(largestDifference, difference)
  }
  return { name, fitsPerSecond, largestDifference, failures }
}

function ours(task: Task): number | null {
  const timeH = Float64Array.from(task.hours)
  const data = { timeH, ppm: Float64Array.from(task.ppm), sdPpm: new Float64Array(timeH.length).fill(5) }
  const [excess, rate, background] = task.start
  const start = { logStartExcess: Math.log(excess), ratesPerHour: [rate], backgroundPpm: background }
  return fitPiecewise(data, 0, [], null, start)?.ratesPerHour[0] ?? null
}

function generalPackage(task: Task): number | null {
  try {
    const found = levenbergMarquardt(
      { x: task.hours, y: task.ppm },
      ([excess, rate, background]) =>
        (t: number) =>
          background! + excess! * Math.exp(-rate! * t),
      { initialValues: task.start, damping: 1e-2, maxIterations: 100, errorTolerance: 1e-9 },
    )
    return found.parameterValues[1]!
  } catch {
    return null
  }
}

/** SciPy's curve_fit in a process of its own, which times its fits itself; null where python3-scipy is not installed. */
function scipy(tasks: readonly Task[], reference: readonly number[]): Contestant[] {
  const python = '/usr/bin/python3'
  if (!existsSync(python)) return []
  const script = join(import.meta.dirname, 'scipy-fits.py')
  const run = spawnSync(python, [script], {
    input: JSON.stringify(tasks),
    encoding: 'utf8',
    maxBuffer: 1 << 26,
  })
  if (run.status !== 0) return []
  const ways = JSON.parse(run.stdout) as { name: string; seconds: number; rates: number[] }[]
  return ways.map((way) => against(way.name, way.rates, reference, tasks.length / way.seconds))
}

/** Fits the same decays with every program, from the same start, and compares speed and answers. */
export function compareFits(seed: number): Contestant[] {
  const tasks = makeTasks(seed, 400)
  const own = timed('Ebbmark', tasks, ours, null)
  const general = timed('ml-levenberg-marquardt', tasks.slice(0, 100), generalPackage, own.rates)
  return [own.contestant, general.contestant, ...scipy(tasks, own.rates)]
}

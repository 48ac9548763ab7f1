import { STEP_S } from './air'
import type { Random } from './random'

/** One reading as the logger writes it: `clockS` is what the sensor's clock said, `trueS` when it really was. */
export type Reading = { trueS: number; clockS: number; ppm: number }

export type SensorPlan = {
  intervalS: number
  /** first-order lag of housing and cell, seconds */
  lagS: number
  gain: number
  offsetPpm: number
  driftPpmPerDay: number
  /** a baseline that wanders slowly: amplitude and period */
  baselinePpm: number
  baselinePeriodS: number
  whitePpm: number
  /** correlated noise from imperfect mixing, as a share of the excess over 420 ppm, and its correlation time */
  mixingShare: number
  mixingS: number
  resolutionPpm: number
  rangeMaxPpm: number
  /** report only when the value moved by this much (0: every interval), at the latest after `heartbeatS` */
  deadbandPpm: number
  heartbeatS: number
}

export const SOUND_SENSOR: SensorPlan = {
  intervalS: 60,
  lagS: 40,
  gain: 1,
  offsetPpm: 0,
  driftPpmPerDay: 0,
  baselinePpm: 0,
  baselinePeriodS: 43_200,
  whitePpm: 3,
  mixingShare: 0.008,
  mixingS: 360,
  resolutionPpm: 1,
  rangeMaxPpm: 5000,
  deadbandPpm: 0,
  heartbeatS: 7200,
}

/** The air at the sensor's cell: lagged, with the slow fluctuation that imperfect mixing leaves. */
function atTheCell(co2Ppm: Float64Array, plan: SensorPlan, random: Random): Float64Array {
  const seen = new Float64Array(co2Ppm.length)
  const follow = 1 - Math.exp(-STEP_S / plan.lagS)
  const keep = Math.exp(-STEP_S / plan.mixingS)
  const kick = plan.mixingShare * Math.sqrt(1 - keep * keep)
  let cell = co2Ppm[0]!
  let mixing = 0
  for (let i = 0; i < co2Ppm.length; i++) {
    mixing = mixing * keep + kick * random.normal(0, 1)
    const local = co2Ppm[i]! + mixing * Math.max(0, co2Ppm[i]! - 420)
    cell += follow * (local - cell)
    seen[i] = cell
  }
  return seen
}

function readingAt(seen: Float64Array, fromS: number, tS: number): number {
  const x = (tS - fromS) / STEP_S
  const i = Math.min(seen.length - 2, Math.max(0, Math.floor(x)))
  return seen[i]! + (x - i) * (seen[i + 1]! - seen[i]!)
}

/** What a sensor reports of the true course: lag, gain, offset, drift, noise, range, resolution, interval or on-change. */
export function observe(co2Ppm: Float64Array, fromS: number, plan: SensorPlan, random: Random): Reading[] {
  const seen = atTheCell(co2Ppm, plan, random.fork('cell'))
  const noise = random.fork('noise')
  const readings: Reading[] = []
  const endS = fromS + (co2Ppm.length - 1) * STEP_S
  const phase = random.uniform(0, 2 * Math.PI)
  let reported: Reading | null = null
  for (let tS = fromS + Math.floor(random.uniform(0, plan.intervalS)); tS < endS; tS += plan.intervalS) {
    const driftPpm = (plan.driftPpmPerDay * (tS - fromS)) / 86_400
    const wavePpm = plan.baselinePpm * Math.sin((2 * Math.PI * (tS - fromS)) / plan.baselinePeriodS + phase)
    const exact = plan.gain * readingAt(seen, fromS, tS) + plan.offsetPpm + driftPpm + wavePpm
    const noisy = Math.min(plan.rangeMaxPpm, exact + noise.normal(0, plan.whitePpm))
    const ppm = Math.max(1, Number((Math.round(noisy / plan.resolutionPpm) * plan.resolutionPpm).toFixed(2)))
    const reading = { trueS: tS, clockS: tS, ppm }
    if (plan.deadbandPpm > 0 && reported) {
      const still = Math.abs(ppm - reported.ppm) < plan.deadbandPpm
      if (still && tS - reported.trueS < plan.heartbeatS) continue
    }
    reported = reading
    readings.push(reading)
  }
  return readings
}

export type Flaws = {
  /** nothing arrives in these true intervals */
  missing: { fromS: number; toS: number }[]
  /** the value stays what it was */
  stuck: { fromS: number; toS: number }[]
  /** the clock is this far off from then on (until the next entry) */
  clock: { fromS: number; offByS: number }[]
  spikeShare: number
  duplicateShare: number
}

export const NO_FLAWS: Flaws = { missing: [], stuck: [], clock: [], spikeShare: 0, duplicateShare: 0 }

/** Damages a record the way loggers do: holes, stuck runs, spikes, repeated rows, a clock that is set. */
export function damage(readings: readonly Reading[], flaws: Flaws, random: Random): Reading[] {
  const inside = (tS: number, spans: Flaws['missing']) => spans.find((s) => tS >= s.fromS && tS < s.toS)
  const damaged: Reading[] = []
  const held = new Map<object, number>()
  for (const reading of readings) {
    if (inside(reading.trueS, flaws.missing)) continue
    const stuck = inside(reading.trueS, flaws.stuck)
    let ppm = reading.ppm
    if (stuck) {
      if (!held.has(stuck)) held.set(stuck, ppm)
      ppm = held.get(stuck)!
    } else if (random.chance(flaws.spikeShare)) {
      ppm = Math.max(1, Math.round(ppm + random.pick([-1, 1, 1]) * random.uniform(150, 900)))
    }
    const setting = flaws.clock.findLast((c) => reading.trueS >= c.fromS)
    const kept = { trueS: reading.trueS, clockS: reading.trueS + (setting?.offByS ?? 0), ppm }
    damaged.push(kept)
    if (random.chance(flaws.duplicateShare)) damaged.push(kept)
  }
  return damaged
}

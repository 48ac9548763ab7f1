/**
 * A small generator of one well-mixed room with known truth, for recovery and coverage tests. It integrates
 * dC/dt = 1e6 n g / V + A (B - C) in ten-second steps, then looks at it through a sensor. Seeded.
 */
import { type SeededRandom, seededRandom } from '@/lib/math/seeded'

export const ROOM_CLASSES = [
  'clean',
  'noisy',
  'short',
  'cleaners',
  'shut-off',
  'drift',
  'demand',
  'outage',
  'coupled',
] as const
export type RoomClass = (typeof ROOM_CLASSES)[number]

export type TrueRoom = {
  kind: RoomClass
  seed: number
  volumeM3: number
  /** first instant, epoch seconds; the truth has one value a minute from there */
  fromS: number
  persons: Float64Array
  ratePerHour: Float64Array
  outdoorRatePerHour: Float64Array
  backgroundPpm: Float64Array
  timeS: Float64Array
  co2Ppm: Float64Array
  neighbour?: { timeS: Float64Array; co2Ppm: Float64Array }
  outdoor: { timeS: Float64Array; co2Ppm: Float64Array }
  /** last departure of each day and when the perfect window after it ends */
  evenings: { leaveS: number; endS: number }[]
}

export type Options = {
  days?: number
  stepS?: number
  sigmaPpm?: number
  phi?: number
  resolutionPpm?: number
}

type Plan = {
  rate: number
  offRate: number
  fanOffS: number[]
  fanOnS: number[]
  persons: { fromS: number; toS: number; count: number; litresPerSecond: number }[]
  evenings: { leaveS: number; endS: number }[]
  demandPerPpm: number
}

/** Monday 2 March 2026, 00:00 UTC: the generator lives in UTC. */
export const GENERATOR_START_S = Date.UTC(2026, 2, 2) / 1000

function occupiedDay(random: SeededRandom, dayS: number, head: number, plan: Plan): number {
  const hour = 3600
  const arrive = dayS + random.between(7.6, 8.8) * hour
  const leave = dayS + random.between(16.2, 18.6) * hour
  const lunch = dayS + random.between(11.9, 12.4) * hour
  const lunchEnd = lunch + random.between(0.5, 1) * hour
  const early = Math.round(head * random.between(0.2, 0.6))
  const spread = random.between(0, 20) * 60
  plan.persons.push({ fromS: arrive, toS: lunch, count: head, litresPerSecond: 0.0049 })
  plan.persons.push({ fromS: lunch, toS: lunchEnd, count: random.whole(0, 2), litresPerSecond: 0.0049 })
  plan.persons.push({ fromS: lunchEnd, toS: leave - spread, count: early, litresPerSecond: 0.0049 })
  plan.persons.push({ fromS: lunchEnd, toS: leave, count: head - early, litresPerSecond: 0.0049 })
  return leave
}

function planEvening(random: SeededRandom, kind: RoomClass, dayS: number, leave: number, plan: Plan): void {
  const hour = 3600
  const rate = plan.rate
  let end = Math.min(dayS + 30 * hour, leave + 5 * (hour / rate))
  const off = dayS + random.between(20.5, 23) * hour
  let fanOff = random.uniform() < 0.5 ? off : Number.POSITIVE_INFINITY
  if (kind === 'short') {
    end = leave + (random.between(0.7, 1.2) * hour) / rate
    plan.persons.push({ fromS: end, toS: end + 2 * hour, count: random.whole(2, 8), litresPerSecond: 0.0049 })
  }
  if (kind === 'cleaners') {
    const enter = leave + random.between(0.5, 1.6) * (hour / rate)
    const stay = random.uniform() < 0.3 ? random.between(3, 6) * 60 : random.between(15, 40) * 60
    plan.persons.push({ fromS: enter, toS: enter + stay, count: random.whole(1, 2), litresPerSecond: 0.008 })
    end = enter
  }
  if (kind === 'shut-off') {
    fanOff = leave + random.between(0.35, 1.1) * (hour / rate)
    end = fanOff
  }
  if (Number.isFinite(fanOff)) {
    plan.fanOffS.push(fanOff)
    plan.fanOnS.push(dayS + random.between(29.8, 30.9) * hour)
    end = Math.min(end, fanOff)
  }
  plan.evenings.push({ leaveS: leave, endS: end })
}

function makePlan(random: SeededRandom, kind: RoomClass, days: number, volumeM3: number): Plan {
  const rate = Math.exp(random.between(Math.log(0.7), Math.log(5)))
  const plan: Plan = {
    rate,
    offRate: random.between(0.08, 0.35),
    fanOffS: [],
    fanOnS: [],
    persons: [],
    evenings: [],
    demandPerPpm: kind === 'demand' ? rate / 500 : 0,
  }
  const aim = random.between(350, 1300)
  const steadyRate = kind === 'demand' ? rate * 1.5 : rate
  const head = Math.max(2, Math.round((aim * steadyRate * volumeM3) / 3600 / 4.9))
  for (let day = 0; day < days; day++) {
    const dayS = GENERATOR_START_S + day * 86400
    planEvening(random, kind, dayS, occupiedDay(random, dayS, head, plan), plan)
  }
  return plan
}

function fanRuns(plan: Plan, t: number): boolean {
  return !plan.fanOffS.some((off, i) => t >= off && t < plan.fanOnS[i]!)
}

function integrate(
  room: TrueRoom,
  plan: Plan,
  random: SeededRandom,
  minutes: number,
  clean: Float64Array,
  corridor: Float64Array,
) {
  const exchange = room.kind === 'coupled' ? plan.rate * random.between(0.2, 0.7) : 0
  const base = 425 + 8 * random.normal()
  let ppm = base + 20
  let corridorPpm = base + 20
  for (let minute = 0; minute < minutes; minute++) {
    const background = base + 6 * Math.sin((2 * Math.PI * (minute - 300)) / 1440)
    room.backgroundPpm[minute] = background
    for (let step = 0; step < 6; step++) {
      const t = room.fromS + minute * 60 + step * 10
      let source = 0
      let persons = 0
      for (const stay of plan.persons) {
        if (t < stay.fromS || t >= stay.toS) continue
        source += stay.count * stay.litresPerSecond
        persons += stay.count
      }
      const runs = fanRuns(plan, t)
      const demand = Math.min(1.6 * plan.rate, plan.demandPerPpm * Math.max(0, ppm - background - 150))
      const outdoorRate =
        (runs ? plan.rate * (plan.demandPerPpm > 0 ? 0.5 : 1) : plan.offRate) + (runs ? demand : 0)
      const rate = outdoorRate + exchange
      const toward = (outdoorRate * background + exchange * corridorPpm) / rate
      const target = toward + (3.6e6 * source) / (rate * room.volumeM3)
      ppm = target + (ppm - target) * Math.exp((-rate * 10) / 3600)
      const corridorTarget = background + (persons > 0 ? 300 : 0)
      corridorPpm = corridorTarget + (corridorPpm - corridorTarget) * Math.exp((-1.2 * 10) / 3600)
      if (step === 0) {
        room.persons[minute] = persons
        room.ratePerHour[minute] = rate
        room.outdoorRatePerHour[minute] = outdoorRate
        clean[minute] = ppm
        corridor[minute] = corridorPpm
      }
    }
  }
}

/** Looks at true values through a sensor: offset, drift, AR(1) plus white noise, resolution, sampling step. */
function sense(random: SeededRandom, fromS: number, truth: Float64Array, kind: RoomClass, options: Options) {
  const stepMinutes = Math.max(1, Math.round((options.stepS ?? 60) / 60))
  const sigma = options.sigmaPpm ?? (kind === 'noisy' ? 20 : 5)
  const phi = options.phi ?? 0
  const resolution = options.resolutionPpm ?? 1
  const offset = 20 * random.normal()
  const driftPerDay = kind === 'drift' ? random.between(-12, 12) : 0
  const timeS: number[] = []
  const co2Ppm: number[] = []
  let error = sigma * random.normal()
  for (let minute = 0; minute < truth.length; minute += stepMinutes) {
    error = phi * error + sigma * Math.sqrt(1 - phi * phi) * random.normal()
    const read = truth[minute]! + offset + (driftPerDay * minute) / 1440 + error
    timeS.push(fromS + minute * 60)
    co2Ppm.push(Math.round(read / resolution) * resolution)
  }
  return { timeS: Float64Array.from(timeS), co2Ppm: Float64Array.from(co2Ppm) }
}

function cutOutages(random: SeededRandom, room: TrueRoom): void {
  const gaps = room.evenings.map((evening) => {
    const start = evening.leaveS + random.between(-10, 60) * 60
    return { start, end: start + random.between(10, 120) * 60 }
  })
  const keep: number[] = []
  room.timeS.forEach((t, i) => {
    if (!gaps.some((gap) => t >= gap.start && t < gap.end)) keep.push(i)
  })
  room.timeS = Float64Array.from(keep, (i) => room.timeS[i]!)
  room.co2Ppm = Float64Array.from(keep, (i) => room.co2Ppm[i]!)
}

/** One room of a class over some days (from Monday 2 March 2026, UTC) with everything that is true of it. */
export function generateRoom(kind: RoomClass, seed: number, options: Options = {}): TrueRoom {
  const random = seededRandom(seed * 7919 + ROOM_CLASSES.indexOf(kind) * 104729)
  const days = options.days ?? 3
  const minutes = (days + 1) * 1440
  const volumeM3 = random.between(60, 300)
  const plan = makePlan(random, kind, days, volumeM3)
  const empty = () => new Float64Array(minutes)
  const room: TrueRoom = {
    kind,
    seed,
    volumeM3,
    fromS: GENERATOR_START_S,
    persons: empty(),
    ratePerHour: empty(),
    outdoorRatePerHour: empty(),
    backgroundPpm: empty(),
    timeS: empty(),
    co2Ppm: empty(),
    outdoor: { timeS: empty(), co2Ppm: empty() },
    evenings: plan.evenings,
  }
  const clean = empty()
  const corridor = empty()
  integrate(room, plan, random, minutes, clean, corridor)
  Object.assign(room, sense(random, room.fromS, clean, kind, options))
  room.outdoor = sense(random, room.fromS, room.backgroundPpm, 'clean', { stepS: 300, sigmaPpm: 4 })
  if (kind === 'coupled') room.neighbour = sense(random, room.fromS, corridor, 'clean', options)
  if (kind === 'outage') cutOutages(random, room)
  return room
}

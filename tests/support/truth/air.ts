import type { Stay } from './people'
import type { Random } from './random'

/** Step of the integration, seconds: every sampling instant is read off this grid by linear interpolation. */
export const STEP_S = 10

/** A rate that holds from an instant until the next knot, per hour. */
export type Knot = { fromS: number; perHour: number }

export type ZonePlan = {
  volumeM3: number
  stays: Stay[]
  /** outdoor air change rate, piecewise constant */
  outdoorRate: Knot[]
  /** demand control: the outdoor rate grows by this much per ppm above outdoor, up to a ceiling */
  demand?: { perHourPerPpm: number; ceilingPerHour: number }
  /** air that arrives from another zone (a corridor, or the rest of the building through the air handler) */
  exchange?: { zone: number; rate: Knot[] }
  /** level at the start; 30 ppm above outdoors unless given */
  startPpm?: number
  /** relative sd and correlation time of the slow wander of the outdoor rate (wind, filters, doors) */
  wander: { sd: number; correlationS: number }
}

/** What really happened in a zone, on the grid of `STEP_S`. Rates per hour, CO2 in ppm. */
export type ZoneRecord = {
  fromS: number
  co2Ppm: Float64Array
  outdoorPerHour: Float64Array
  totalPerHour: Float64Array
  persons: Uint8Array
}

/** Outdoor CO2 on the same grid: a level, a daily wave, and weather that wanders over hours. */
export function outdoorAir(fromS: number, steps: number, levelPpm: number, random: Random): Float64Array {
  const co2Ppm = new Float64Array(steps)
  const wave = random.uniform(3, 9)
  const phase = random.uniform(0, 2 * Math.PI)
  const keep = Math.exp(-STEP_S / 14_400)
  const kick = 4 * Math.sqrt(1 - keep * keep)
  let weather = random.normal(0, 4)
  for (let i = 0; i < steps; i++) {
    weather = weather * keep + kick * random.normal(0, 1)
    co2Ppm[i] = levelPpm + wave * Math.sin((2 * Math.PI * (fromS + i * STEP_S)) / 86_400 + phase) + weather
  }
  return co2Ppm
}

function knotValues(knots: readonly Knot[], fromS: number, steps: number): Float64Array {
  const values = new Float64Array(steps)
  let k = 0
  for (let i = 0; i < steps; i++) {
    const tS = fromS + i * STEP_S
    while (k + 1 < knots.length && knots[k + 1]!.fromS <= tS) k++
    values[i] = knots[k]!.perHour
  }
  return values
}

function sourcesOf(plan: ZonePlan, fromS: number, steps: number) {
  const ppmPerHour = new Float64Array(steps + 1)
  const heads = new Int16Array(steps + 1)
  const at = (tS: number) => Math.min(steps, Math.max(0, Math.round((tS - fromS) / STEP_S)))
  for (const stay of plan.stays) {
    // 1 L/s = 3.6 m3/h; divided by the volume and in parts per million
    const ppm = (3.6e6 * stay.generationLps) / plan.volumeM3
    const a = at(stay.fromS)
    const b = at(stay.toS)
    if (b <= a) continue
    ppmPerHour[a]! += ppm
    ppmPerHour[b]! -= ppm
    heads[a]! += stay.persons
    heads[b]! -= stay.persons
  }
  const persons = new Uint8Array(steps)
  let ppm = 0
  let count = 0
  for (let i = 0; i < steps; i++) {
    ppm += ppmPerHour[i]!
    count += heads[i]!
    persons[i] = count
    ppmPerHour[i] = count > 0 ? ppm : 0
  }
  return { ppmPerHour, persons }
}

/** Multiplies a rate by slow, positive noise of mean one (a log-normal first-order process). */
function wander(rate: Float64Array, sd: number, correlationS: number, random: Random) {
  if (sd <= 0) return
  const keep = Math.exp(-STEP_S / correlationS)
  const kick = sd * Math.sqrt(1 - keep * keep)
  let state = random.normal(0, sd)
  for (let i = 0; i < rate.length; i++) {
    rate[i]! *= Math.exp(state - (sd * sd) / 2)
    state = state * keep + kick * random.normal(0, 1)
  }
}

/**
 * Integrates the well-mixed mass balance of several zones, V dC/dt = 1e6 G + Q (Co − C) + Qx (Cn − C), by an exact exponential
 * per 10 s step with inputs held over the step; a neighbour's level is taken as the mean of the step's start and predicted end.
 */
export function integrate(
  plans: readonly ZonePlan[],
  fromS: number,
  outdoor: Float64Array,
  random: Random,
): ZoneRecord[] {
  const steps = outdoor.length
  const zones = plans.map((plan, z) => {
    const outdoorPerHour = knotValues(plan.outdoorRate, fromS, steps)
    wander(outdoorPerHour, plan.wander.sd, plan.wander.correlationS, random.fork(`wander ${z}`))
    const exchangePerHour = plan.exchange ? knotValues(plan.exchange.rate, fromS, steps) : null
    return {
      plan,
      outdoorPerHour,
      exchangePerHour,
      ...sourcesOf(plan, fromS, steps),
      co2Ppm: new Float64Array(steps),
    }
  })
  const hours = STEP_S / 3600
  const now = zones.map((zone) => zone.plan.startPpm ?? outdoor[0]! + 30)
  const guess = [...now]
  const advance = (z: number, i: number, neighbourPpm: number) => {
    const zone = zones[z]!
    const exchange = zone.exchangePerHour?.[i] ?? 0
    const rate = zone.outdoorPerHour[i]! + exchange
    const level =
      (zone.outdoorPerHour[i]! * outdoor[i]! + exchange * neighbourPpm + zone.ppmPerHour[i]!) / rate
    return level + (now[z]! - level) * Math.exp(-rate * hours)
  }
  for (let i = 0; i < steps; i++) {
    for (const [z, zone] of zones.entries()) {
      zone.co2Ppm[i] = now[z]!
      const demand = zone.plan.demand
      if (!demand) continue
      const extra = demand.perHourPerPpm * Math.max(0, now[z]! - outdoor[i]!)
      zone.outdoorPerHour[i] = Math.min(demand.ceilingPerHour, zone.outdoorPerHour[i]! + extra)
    }
    const neighbourOf = (z: number) => zones[z]!.plan.exchange?.zone ?? z
    for (let z = 0; z < zones.length; z++) guess[z] = advance(z, i, now[neighbourOf(z)]!)
    const next = zones.map((_, z) => advance(z, i, (now[neighbourOf(z)]! + guess[neighbourOf(z)]!) / 2))
    for (let z = 0; z < zones.length; z++) now[z] = next[z]!
  }
  return zones.map(({ outdoorPerHour, exchangePerHour, co2Ppm, persons }) => ({
    fromS,
    co2Ppm,
    outdoorPerHour,
    totalPerHour: exchangePerHour ? outdoorPerHour.map((a, i) => a + exchangePerHour[i]!) : outdoorPerHour,
    persons,
  }))
}

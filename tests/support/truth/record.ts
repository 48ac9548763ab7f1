import { STEP_S, type ZoneRecord } from './air'

/** The truth about one room, minute by minute, with what is needed to judge any interval that an analysis may name. */
export type Truth = {
  fromS: number
  /** per minute */
  co2Ppm: Float32Array
  outdoorPpm: Float32Array
  outdoorPerHour: Float32Array
  totalPerHour: Float32Array
  persons: Uint8Array
}

/** One stretch without people, long enough to matter, cut where the supply changes. */
export type EmptySpell = {
  fromS: number
  toS: number
  /** the part before the supply's first step */
  steadyToS: number
  startExcessPpm: number
  /** outdoor rate in the steady part, and total with what comes from a neighbour, per hour */
  outdoorPerHour: number
  totalPerHour: number
}

/** What really happened inside [startS, endS]. */
export type Interval = {
  outdoorPerHour: number
  totalPerHour: number
  peopleMinutes: number
  /** the lowest and highest rate in force (a minute's mean) */
  lowestPerHour: number
  highestPerHour: number
  startExcessPpm: number
}

const PER_MINUTE = 60 / STEP_S

/** Keeps every sixth step of the integration, people by their maximum and rates by their mean. */
export function keepMinutes(zone: ZoneRecord, outdoor: Float64Array): Truth {
  const minutes = Math.floor(zone.co2Ppm.length / PER_MINUTE)
  const truth: Truth = {
    fromS: zone.fromS,
    co2Ppm: new Float32Array(minutes),
    outdoorPpm: new Float32Array(minutes),
    outdoorPerHour: new Float32Array(minutes),
    totalPerHour: new Float32Array(minutes),
    persons: new Uint8Array(minutes),
  }
  for (let m = 0; m < minutes; m++) {
    const i = m * PER_MINUTE
    let outdoorRate = 0
    let totalRate = 0
    for (let k = i; k < i + PER_MINUTE; k++) {
      outdoorRate += zone.outdoorPerHour[k]! / PER_MINUTE
      totalRate += zone.totalPerHour[k]! / PER_MINUTE
      truth.persons[m] = Math.max(truth.persons[m]!, zone.persons[k]!)
    }
    truth.co2Ppm[m] = zone.co2Ppm[i]!
    truth.outdoorPpm[m] = outdoor[i]!
    truth.outdoorPerHour[m] = outdoorRate
    truth.totalPerHour[m] = totalRate
  }
  return truth
}

const minuteOf = (truth: Truth, tS: number) =>
  Math.min(truth.co2Ppm.length - 1, Math.max(0, Math.floor((tS - truth.fromS) / 60)))

/** The truth about an interval that an answer names; both ends in true time. */
export function describe(truth: Truth, startS: number, endS: number): Interval {
  const a = minuteOf(truth, startS)
  const b = Math.max(a + 1, minuteOf(truth, endS))
  let outdoorSum = 0
  let totalSum = 0
  let peopleMinutes = 0
  let lowest = Infinity
  let highest = 0
  for (let m = a; m < b; m++) {
    outdoorSum += truth.outdoorPerHour[m]!
    totalSum += truth.totalPerHour[m]!
    if (truth.persons[m]! > 0) peopleMinutes++
    lowest = Math.min(lowest, truth.outdoorPerHour[m]!)
    highest = Math.max(highest, truth.outdoorPerHour[m]!)
  }
  return {
    outdoorPerHour: outdoorSum / (b - a),
    totalPerHour: totalSum / (b - a),
    peopleMinutes,
    lowestPerHour: lowest,
    highestPerHour: highest,
    startExcessPpm: truth.co2Ppm[a]! - truth.outdoorPpm[a]!,
  }
}

/** When the rate of a demand-controlled room has fallen to 60 % of what it was at minute `m`: one rate no longer speaks for it. */
function fallenTo(truth: Truth, m: number, end: number): number {
  let k = m
  while (k < end && truth.outdoorPerHour[k]! > 0.6 * truth.outdoorPerHour[m]!) k++
  return truth.fromS + k * 60
}

/** Every stretch without people of at least `leastMinutes`, cut at the given instants where the supply steps. */
export function emptySpells(truth: Truth, supplySteps: readonly number[], leastMinutes = 10): EmptySpell[] {
  const spells: EmptySpell[] = []
  const minutes = truth.persons.length
  for (let m = 0; m < minutes; ) {
    if (truth.persons[m]! > 0) {
      m++
      continue
    }
    let end = m
    while (end < minutes && truth.persons[end] === 0) end++
    if (m > 0 && end - m >= leastMinutes) {
      const fromS = truth.fromS + m * 60
      const toS = truth.fromS + end * 60
      const stepS = supplySteps.find((s) => s > fromS && s < toS) ?? toS
      const steadyToS = Math.min(stepS, fallenTo(truth, m, end))
      const inside = describe(truth, fromS, steadyToS)
      spells.push({
        fromS,
        toS,
        steadyToS,
        startExcessPpm: inside.startExcessPpm,
        outdoorPerHour: inside.outdoorPerHour,
        totalPerHour: inside.totalPerHour,
      })
    }
    m = end
  }
  return spells
}

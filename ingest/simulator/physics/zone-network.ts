/**
 * Well-mixed zones joined by air flows: V dC/dt = Σ Q (C_in − C) + generation, integrated for all zones together.
 * Every flow is balanced (what enters leaves), so nothing but outdoor exchange and generation changes the CO2 held.
 */
export type ZoneNetwork = {
  volumesM3: Float64Array
  /** outdoor air into each zone, room air out, m³/h */
  outdoorM3PerHour: Float64Array
  outdoorPpm: number
  /** CO2 breathed out in each zone, L/s */
  sourceLps: Float64Array
  /** two-way exchange between zones a and b, m³/h each direction */
  exchanges: readonly { a: number; b: number }[]
  exchangeM3PerHour: Float64Array
  /** groups that share an air handler with return air; the flows of `supplyM3PerHour` are theirs */
  returnGroups: readonly { zones: readonly number[]; outdoorFraction: number }[]
  supplyM3PerHour: Float64Array
}

/** An empty network: volumes and connections given, every flow and source nil. */
export function makeNetwork(
  volumesM3: readonly number[],
  exchanges: ZoneNetwork['exchanges'],
  returnGroups: ZoneNetwork['returnGroups'] = [],
): ZoneNetwork {
  const zones = volumesM3.length
  return {
    volumesM3: Float64Array.from(volumesM3),
    outdoorM3PerHour: new Float64Array(zones),
    outdoorPpm: 0,
    sourceLps: new Float64Array(zones),
    exchanges,
    exchangeM3PerHour: new Float64Array(exchanges.length),
    returnGroups,
    supplyM3PerHour: new Float64Array(zones),
  }
}

/** Rate of change of every zone's CO2, ppm/s, written into `out`. */
export function co2RatePpmPerS(net: ZoneNetwork, co2Ppm: Float64Array, out: Float64Array): void {
  for (let z = 0; z < co2Ppm.length; z++) {
    // 1 L/s of CO2 into 1 m³ is 1000 ppm a second
    out[z] = 1000 * net.sourceLps[z]! + (net.outdoorM3PerHour[z]! / 3600) * (net.outdoorPpm - co2Ppm[z]!)
  }
  for (let e = 0; e < net.exchanges.length; e++) {
    const { a, b } = net.exchanges[e]!
    const transfer = (net.exchangeM3PerHour[e]! / 3600) * (co2Ppm[b]! - co2Ppm[a]!)
    out[a]! += transfer
    out[b]! -= transfer
  }
  for (const group of net.returnGroups) addSupply(net, group, co2Ppm, out)
  for (let z = 0; z < co2Ppm.length; z++) out[z]! /= net.volumesM3[z]!
}

function addSupply(
  net: ZoneNetwork,
  group: ZoneNetwork['returnGroups'][number],
  co2Ppm: Float64Array,
  out: Float64Array,
): void {
  let flow = 0
  let carried = 0
  for (const z of group.zones) {
    flow += net.supplyM3PerHour[z]!
    carried += net.supplyM3PerHour[z]! * co2Ppm[z]!
  }
  if (flow === 0) return
  const supplyPpm = group.outdoorFraction * net.outdoorPpm + (1 - group.outdoorFraction) * (carried / flow)
  for (const z of group.zones) out[z]! += (net.supplyM3PerHour[z]! / 3600) * (supplyPpm - co2Ppm[z]!)
}

/** Fastest exchange rate of any zone, 1/s: what the step must follow. */
export function fastestRatePerS(net: ZoneNetwork): number {
  const leaving = net.outdoorM3PerHour.map((flow, z) => flow + net.supplyM3PerHour[z]!)
  net.exchanges.forEach(({ a, b }, e) => {
    leaving[a]! += net.exchangeM3PerHour[e]!
    leaving[b]! += net.exchangeM3PerHour[e]!
  })
  let fastest = 0
  leaving.forEach((flow, z) => {
    fastest = Math.max(fastest, flow / 3600 / net.volumesM3[z]!)
  })
  return fastest
}

/** Classical Runge–Kutta of fourth order with its working space. */
export class ZoneIntegrator {
  private readonly k: Float64Array[]
  private readonly trial: Float64Array
  constructor(readonly net: ZoneNetwork) {
    const zones = net.volumesM3.length
    this.k = [0, 1, 2, 3].map(() => new Float64Array(zones))
    this.trial = new Float64Array(zones)
  }

  /** Equal steps for `spanS` so that rate × step stays under 0.1 (error of a step under 1e-7), at least `least`. */
  stepsFor(spanS: number, least = 1): number {
    return Math.max(least, Math.ceil((fastestRatePerS(this.net) * spanS) / 0.1))
  }

  /** Moves `co2Ppm` forward by one step of `stepS` seconds, flows and sources constant. */
  step(co2Ppm: Float64Array, stepS: number): void {
    const [k1, k2, k3, k4] = this.k as [Float64Array, Float64Array, Float64Array, Float64Array]
    co2RatePpmPerS(this.net, co2Ppm, k1)
    this.probe(co2Ppm, k1, stepS / 2, k2)
    this.probe(co2Ppm, k2, stepS / 2, k3)
    this.probe(co2Ppm, k3, stepS, k4)
    for (let z = 0; z < co2Ppm.length; z++) {
      co2Ppm[z]! += (stepS / 6) * (k1[z]! + 2 * k2[z]! + 2 * k3[z]! + k4[z]!)
    }
  }

  private probe(co2Ppm: Float64Array, slope: Float64Array, stepS: number, out: Float64Array): void {
    for (let z = 0; z < co2Ppm.length; z++) this.trial[z] = co2Ppm[z]! + stepS * slope[z]!
    co2RatePpmPerS(this.net, this.trial, out)
  }
}

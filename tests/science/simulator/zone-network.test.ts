import { describe, expect, it } from 'vitest'
import { makeNetwork, ZoneIntegrator, type ZoneNetwork } from '@/ingest/simulator/physics/zone-network'

/** Runs a network for a span, calling `each` after every step (and at the start). */
function run(
  net: ZoneNetwork,
  co2Ppm: Float64Array,
  spanS: number,
  stepS: number,
  each: (timeS: number) => void = () => undefined,
): void {
  const integrator = new ZoneIntegrator(net)
  each(0)
  for (let k = 1; k <= Math.round(spanS / stepS); k++) {
    integrator.step(co2Ppm, stepS)
    each(k * stepS)
  }
}

describe('one zone against its closed form', () => {
  // methods §1.1: C(t) = Cb + Ess + (C0 − Cb − Ess) e^(−A t); T19: V 200 m³, Q 80 L/s, n 10, g 0.0052 L/s, 800 ppm, 5 min → 830.5315
  it('gives test vector T19', () => {
    const net = makeNetwork([200], [])
    net.outdoorM3PerHour[0] = 80 * 3.6
    net.outdoorPpm = 420
    net.sourceLps[0] = 10 * 0.0052
    const co2 = Float64Array.of(800)
    run(net, co2, 300, 20)
    expect(co2[0]).toBeCloseTo(830.5315, 3)
  })

  // T18: V 180 m³, A 3 1/h, n 25, g 0.0048, from 420 ppm: C(1 h) = 1180.170, C(0.5 h) = 1041.496
  it('gives test vector T18', () => {
    const net = makeNetwork([180], [])
    net.outdoorM3PerHour[0] = 3 * 180
    net.outdoorPpm = 420
    net.sourceLps[0] = 25 * 0.0048
    const co2 = Float64Array.of(420)
    run(net, co2, 1800, 20)
    expect(co2[0]).toBeCloseTo(1041.496, 2)
    run(net, co2, 1800, 20)
    expect(co2[0]).toBeCloseTo(1180.17, 2)
  })
})

describe('two zones', () => {
  /** T49 (methods §1.11): V 60 and 300 m³, outdoor 120 and 600 m³/h, exchange 300 m³/h: eigen-rates 2 and 8 1/h. */
  const coupled = () => {
    const net = makeNetwork([60, 300], [{ a: 0, b: 1 }])
    net.outdoorM3PerHour.set([120, 600])
    net.exchangeM3PerHour[0] = 300
    return net
  }

  it('decay with the eigen-rates of test vector T49', () => {
    const alone = Float64Array.of(800, 0)
    run(coupled(), alone, 3600, 20)
    expect(alone[0]! / 18.26835).toBeCloseTo(1, 5)
    const together = Float64Array.of(800, 400)
    run(coupled(), together, 3600, 20)
    expect(together[0]! / 63.26829).toBeCloseTo(1, 5)
  })

  it('keep mass to 1e-6 over a day with people, exchange and outdoor air that changes', () => {
    const net = coupled()
    const co2 = Float64Array.of(900, 500)
    const held = () => (60 * co2[0]! + 300 * co2[1]!) / 1e6
    const integrator = new ZoneIntegrator(net)
    let [gained, moved] = [0, 0]
    const start = held()
    for (let minute = 0; minute < 1440; minute++) {
      net.sourceLps.set(minute % 180 < 95 ? [0.028, 0.11] : [0.004, 0])
      net.exchangeM3PerHour[0] = minute % 240 < 120 ? 300 : 15
      net.outdoorM3PerHour.set(minute > 420 && minute < 1140 ? [120, 600] : [9, 60])
      net.outdoorPpm = 430 + 12 * Math.sin(minute / 200)
      // what crosses the outer walls, by Simpson's rule on the trajectory: bookkeeping the integrator knows nothing of
      const crossing = () =>
        ((net.outdoorPpm - co2[0]!) * net.outdoorM3PerHour[0]! +
          (net.outdoorPpm - co2[1]!) * net.outdoorM3PerHour[1]!) /
        1e6 /
        3600
      for (let half = 0; half < 3; half++) {
        const a = crossing()
        integrator.step(co2, 10)
        const b = crossing()
        integrator.step(co2, 10)
        gained += (20 * (a + 4 * b + crossing())) / 6
      }
      gained += (60 * (net.sourceLps[0]! + net.sourceLps[1]!)) / 1000
      moved += (60 * (net.sourceLps[0]! + net.sourceLps[1]!)) / 1000
    }
    expect(Math.abs(held() - start - gained) / moved).toBeLessThan(1e-6)
  })

  it('sealed from outdoors, share out what they hold and lose nothing', () => {
    const net = coupled()
    net.outdoorM3PerHour.fill(0)
    const co2 = Float64Array.of(900, 500)
    run(net, co2, 86400, 20)
    // all CO2 stays and spreads evenly: (60·900 + 300·500) / 360
    expect(co2[0]).toBeCloseTo(204000 / 360, 6)
    expect(co2[1]).toBeCloseTo(204000 / 360, 6)
  })
})

describe('an air handler with return air', () => {
  it('settles where outdoor intake carries the people: C = Co + G / (X Q)', () => {
    // mass balance of the group as one box (textbook): 0.1 L/s over 0.3 · 400 L/s of outdoor air is 833.333 ppm
    const net = makeNetwork([100, 150], [], [{ zones: [0, 1], outdoorFraction: 0.3 }])
    net.supplyM3PerHour.set([160 * 3.6, 240 * 3.6])
    net.outdoorPpm = 430
    net.sourceLps.set([0.04, 0.06])
    const co2 = Float64Array.of(430, 430)
    run(net, co2, 40 * 3600, 20)
    const returned = (160 * co2[0]! + 240 * co2[1]!) / 400
    expect(returned).toBeCloseTo(430 + 1e6 * (0.1 / (0.3 * 400)), 4)
  })
})

describe('steps', () => {
  it('are short enough for a very quick zone', () => {
    const net = makeNetwork([10], [])
    net.outdoorM3PerHour[0] = 10 * 400 // 400 air changes an hour
    net.outdoorPpm = 400
    const integrator = new ZoneIntegrator(net)
    const steps = integrator.stepsFor(60)
    const co2 = Float64Array.of(1400)
    for (let k = 0; k < steps; k++) integrator.step(co2, 60 / steps)
    expect((co2[0]! - 400) / (1000 * Math.exp(-400 / 60))).toBeCloseTo(1, 4)
  })
})

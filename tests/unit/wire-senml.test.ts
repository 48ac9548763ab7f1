import { describe, expect, it } from 'vitest'
import { parseReadings } from '@/lib/wire/mqtt'

const nowMs = Date.UTC(2026, 2, 2, 7, 31, 0, 250)
const nowS = Math.floor(nowMs / 1000)
const parse = (pack: unknown) => parseReadings(Buffer.from(JSON.stringify(pack)), nowMs)

describe('SenML packs (RFC 8428)', () => {
  it('resolve base name, time and unit as §5.1.3 shows, one reading per time', () => {
    const { readings, refusals } = parse([
      { bn: 'urn:dev:ow:10e2073a01080063:', bt: 1772436600, bu: 'ppm', n: 'co2', v: 812 },
      { n: 'temp', u: 'Cel', v: 21.4 },
      { n: 'rh', u: '%RH', v: 38 },
      { n: 'co2', t: -60, v: 805 },
      { n: 'battery', u: '%EL', v: 91 },
      { n: 'rssi', u: 'dBm', v: -67 },
    ])
    expect(refusals).toEqual([])
    expect(readings).toEqual([
      {
        atMs: 1772436600_000,
        co2Ppm: 812,
        tempC: 21.4,
        rhPct: 38,
        batteryPct: 91,
        rssiDbm: -67,
        marked: false,
      },
      {
        atMs: 1772436540_000,
        co2Ppm: 805,
        tempC: null,
        rhPct: null,
        batteryPct: null,
        rssiDbm: null,
        marked: false,
      },
    ])
  })
  it('take times below 2^28 as relative to now (§4.5.3)', () => {
    const { readings } = parse([
      { n: 'co2', v: 600 },
      { n: 'co2', t: -120, v: 601 },
    ])
    expect(readings.map((reading) => [reading.atMs / 1000, reading.co2Ppm])).toEqual([
      [nowS, 600],
      [nowS - 120, 601],
    ])
  })
  it('add the base value and convert units', () => {
    const { readings } = parse([
      { n: 'co2', bv: 400, v: 12 },
      { n: 'temp', bv: 0, u: 'K', v: 294.15 },
    ])
    expect(readings[0]?.co2Ppm).toBe(412)
    expect(readings[0]?.tempC).toBeCloseTo(21, 9)
  })
  it('pass by records of other names, as a door contact', () => {
    const { readings, refusals } = parse([
      { n: 'co2', v: 600 },
      { n: 'door', vb: true },
      { n: 'pm2_5', v: 3 },
    ])
    expect([readings.length, refusals.length]).toEqual([1, 0])
  })
  it.each([
    [[{ n: 'co2', u: '%', v: 0.06 }], 'wrong-unit'],
    [[{ n: 'co2', v: '600' }], 'wrong-type'],
    [[{ n: 'co2', v: 600, bver: 11 }], 'bad-payload'],
    [[{ n: 'co2', v: 600, foo_: 1 }], 'bad-payload'],
    [[{ n: 'temp', v: 21 }], 'missing-co2'],
    [[{ n: 'co2', v: 0 }], 'implausible-value'],
    [[{ n: 'co2', v: 500, t: 1e300 }], 'bad-time'],
    [Array.from({ length: 2501 }, () => ({ n: 'co2', v: 500 })), 'too-many-items'],
  ])('refuse %.40j as %s', (pack, reason) => {
    const { readings, refusals } = parse(pack)
    expect(readings).toEqual([])
    expect(refusals.map((refusal) => refusal.reason)).toEqual([reason])
  })
  it('cost a bad record alone', () => {
    const { readings, refusals } = parse([
      { n: 'co2', v: 600 },
      { n: 'temp', u: 'F', v: 70 },
    ])
    expect(readings).toHaveLength(1)
    expect(refusals[0]).toMatchObject({ reason: 'wrong-unit' })
  })
})

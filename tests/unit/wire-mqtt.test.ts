import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { parseReadings, parseStatus, parseSupply, REFUSAL_REASONS, sampleOf } from '@/lib/wire/mqtt'
import { isoToEpochMs } from '@/lib/wire/mqtt-time'

const nowMs = Date.UTC(2026, 2, 2, 7, 31, 0, 250)
const bytes = (value: unknown) => Buffer.from(typeof value === 'string' ? value : JSON.stringify(value))
const parse = (value: unknown) => parseReadings(bytes(value), nowMs)
const reasons = (value: unknown) => parse(value).refusals.map((refusal) => refusal.reason)

describe('one reading', () => {
  it('takes every quantity', () => {
    const sent = {
      t: '2026-03-02T07:31:00Z',
      co2_ppm: 812,
      temp_c: 21.4,
      rh_pct: 38,
      battery_pct: 91,
      rssi_dbm: -67,
    }
    expect(parse(sent)).toEqual({
      readings: [
        {
          atMs: Date.UTC(2026, 2, 2, 7, 31),
          co2Ppm: 812,
          tempC: 21.4,
          rhPct: 38,
          batteryPct: 91,
          rssiDbm: -67,
          marked: false,
        },
      ],
      refusals: [],
    })
  })
  it('needs co2_ppm only, and takes null for absent', () => {
    const { readings, refusals } = parse({ co2_ppm: 600, temp_c: null, t: null, firmware: '1.2' })
    expect(refusals).toEqual([])
    expect(readings[0]).toMatchObject({
      atMs: nowMs - 250,
      tempC: null,
      rhPct: null,
      batteryPct: null,
      rssiDbm: null,
    })
  })
  it.each([
    ['2026-03-02T07:30:00Z', Date.UTC(2026, 2, 2, 7, 30)],
    ['2026-03-02T08:30:00+01:00', Date.UTC(2026, 2, 2, 7, 30)],
    ['2026-03-02T02:00:00.5-05:30', Date.UTC(2026, 2, 2, 7, 30, 0, 500)],
    [1772436600, 1772436600_000],
    [1772436600.25, 1772436600_250],
    [1772436600_000, 1772436600_000],
  ])('understands the time %j', (t, atMs) => expect(parse({ t, co2_ppm: 500 }).readings[0]?.atMs).toBe(atMs))
  it.each([
    ['2026-03-02T07:30:00', 'bad-time'],
    ['2026-02-30T07:30:00Z', 'bad-time'],
    ['2026-03-02T25:00:00Z', 'bad-time'],
    ['yesterday', 'bad-time'],
    [true, 'bad-time'],
    [{}, 'bad-time'],
    [nowMs + 600_001, 'time-in-future'],
    [nowMs - 400 * 86_400_000 - 1, 'time-too-old'],
    [-5, 'time-too-old'],
    [1e300, 'time-in-future'],
  ])('refuses the time %j as %s', (t, reason) => expect(reasons({ t, co2_ppm: 500 })).toEqual([reason]))
  it('takes times at the very limits', () => {
    expect(reasons({ t: nowMs + 600_000, co2_ppm: 500 })).toEqual([])
    expect(reasons({ t: nowMs - 400 * 86_400_000, co2_ppm: 500 })).toEqual([])
  })
  it.each([
    [0, 'implausible-value'],
    [0.99, 'implausible-value'],
    [50_001, 'implausible-value'],
    [-400, 'implausible-value'],
    ['812', 'wrong-type'],
    [[812], 'wrong-type'],
    [null, 'missing-co2'],
  ])('refuses co2_ppm = %j as %s', (co2, reason) => {
    expect(reasons({ co2_ppm: co2 })).toEqual([reason])
    expect(parse({ co2_ppm: co2 }).readings).toEqual([])
  })
  it('refuses numbers that are not finite', () =>
    expect(reasons('{"co2_ppm":1e999}')).toEqual(['implausible-value']))
  it.each([
    [1, true],
    [349.9, true],
    [350, false],
    [5000, false],
    [5000.1, true],
    [50_000, true],
  ])('stores %d ppm, marked: %s', (co2, marked) =>
    expect(parse({ co2_ppm: co2 }).readings[0]).toMatchObject({ co2Ppm: co2, marked }),
  )
  it('keeps the reading and refuses a bad value beside it', () => {
    const { readings, refusals } = parse({ co2_ppm: 700, temp_c: 999, rh_pct: 'x', battery_pct: 64.6 })
    expect(readings[0]).toMatchObject({ co2Ppm: 700, tempC: null, rhPct: null, batteryPct: 65 })
    expect(refusals.map((refusal) => refusal.reason).sort()).toEqual(['implausible-value', 'wrong-type'])
    expect(refusals.some((refusal) => refusal.detail.includes('temp_c = 999'))).toBe(true)
  })
})

describe('a payload', () => {
  it.each([
    ['', 'bad-json'],
    ['{', 'bad-json'],
    ['null', 'bad-payload'],
    ['5', 'bad-payload'],
    ['"co2"', 'bad-payload'],
    ['[]', 'bad-payload'],
    ['[1]', 'bad-payload'],
    ['{}', 'missing-co2'],
  ])('%j is refused as %s', (text, reason) => expect(reasons(text)).toEqual([reason]))
  it('that is binary, not UTF-8, or a megabyte is refused', () => {
    expect(parseReadings(Buffer.from([0xff, 0xfe, 0, 1]), nowMs).refusals[0]?.reason).toBe('bad-json')
    expect(reasons(`{"co2_ppm":500,"x":"${'y'.repeat(1_048_576)}"}`)).toEqual(['too-large'])
  })
  it('nested without end neither throws nor harms', () => {
    const deep = `${'['.repeat(60_000)}${']'.repeat(60_000)}`
    expect(reasons(`{"co2_ppm":${deep}}`)).toEqual(['wrong-type'])
    expect(reasons(`{"t":${deep},"co2_ppm":500}`)).toEqual(['bad-time'])
    expect(reasons(deep)).toEqual(['bad-payload'])
    expect(reasons('['.repeat(100_000))).toEqual(['bad-json'])
    expect(reasons('{"__proto__":{"co2_ppm":500}}')).toEqual(['missing-co2'])
  })
  it('that is a list is taken item by item', () => {
    const { readings, refusals } = parse([
      { co2_ppm: 500 },
      { co2_ppm: 'x' },
      7,
      { t: nowMs - 60_000, co2_ppm: 501 },
    ])
    expect(readings.map((reading) => reading.co2Ppm)).toEqual([500, 501])
    expect(refusals.map((refusal) => refusal.detail.split(':')[0])).toEqual(['item 2', 'item 3'])
  })
  it('holds up to 500 readings', () => {
    const list = (length: number) =>
      Array.from({ length }, (_, index) => ({ t: nowMs - index * 1000, co2_ppm: 500 }))
    expect(parse(list(500)).readings).toHaveLength(500)
    expect(reasons(list(501))).toEqual(['too-many-items'])
  })
  it('of any bytes at all gives readings or refusals of the closed list, and never throws', () => {
    const any = fc.oneof(fc.json().map(bytes), fc.uint8Array().map(Buffer.from), fc.string().map(bytes))
    fc.assert(
      fc.property(any, (payload) => {
        const { readings, refusals } = parseReadings(payload, nowMs)
        expect(readings.length + refusals.length).toBeGreaterThan(0)
        for (const refusal of refusals) expect(Object.hasOwn(REFUSAL_REASONS, refusal.reason)).toBe(true)
        expect(Buffer.byteLength(sampleOf(payload))).toBeLessThanOrEqual(2048)
        expect(sampleOf(payload)).not.toContain('\u0000')
      }),
    )
  })
})

describe('a sample', () => {
  it('is at most 2 kB, also where a sign is cut', () => {
    expect(Buffer.byteLength(sampleOf(bytes('ä'.repeat(5000))))).toBeLessThanOrEqual(2048)
    expect(Buffer.byteLength(sampleOf(bytes(`a${'ä'.repeat(5000)}`)))).toBeLessThanOrEqual(2048)
    expect(sampleOf(Buffer.from([0, 1, 255]))).toBe('binary, first 3 of 3 bytes: 00 01 ff')
  })
})

describe('ISO 8601 times', () => {
  it('agree with the platform on every valid instant', () => {
    const instants = fc.date({ min: new Date(0), max: new Date('2100-01-01'), noInvalidDate: true })
    fc.assert(fc.property(instants, (date) => isoToEpochMs(date.toISOString()) === date.getTime()))
  })
})

describe('status and supply', () => {
  it('status is one of two words', () => {
    expect(parseStatus(bytes('online'))).toEqual({ status: 'online' })
    expect(parseStatus(bytes('offline'))).toEqual({ status: 'offline' })
    expect(parseStatus(bytes('Online'))).toMatchObject({ reason: 'bad-payload' })
    expect(parseStatus(Buffer.alloc(1_000_000, 65))).toMatchObject({ reason: 'bad-payload' })
  })
  it('supply takes a state with what is known', () => {
    expect(parseSupply(bytes({ t: 1772436600, state: 'reduced', supply_lps: 400 }), nowMs)).toEqual({
      atMs: 1772436600_000,
      state: 'reduced',
      outdoorFraction: null,
      supplyLps: 400,
    })
    expect(parseSupply(bytes({ state: 'half' }), nowMs)).toMatchObject({ reason: 'bad-payload' })
    expect(parseSupply(bytes({ state: 'on', outdoor_fraction: 1.2 }), nowMs)).toMatchObject({
      reason: 'bad-payload',
    })
    expect(parseSupply(bytes({ t: 'x', state: 'on' }), nowMs)).toMatchObject({ reason: 'bad-time' })
    expect(parseSupply(bytes('[]'), nowMs)).toMatchObject({ reason: 'bad-payload' })
  })
})

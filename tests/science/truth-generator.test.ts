import { describe, expect, it } from 'vitest'
import { integrate, outdoorAir, STEP_S, type ZonePlan } from '../support/truth/air'
import type { Answer } from '../support/truth/answer'
import { makeBuilding } from '../support/truth/building'
import { isoZ, localDate, localTimeS } from '../support/truth/calendar'
import { judge } from '../support/truth/judge'
import { randomFrom } from '../support/truth/random'
import { fitDecay } from '../support/truth/rivals/least-squares'
import { studentQuantile975 } from '../support/truth/rivals/statistics'
import { logLine } from '../support/truth/rivals/textbook'

const FROM_S = 1_772_000_000
const still = { sd: 0, correlationS: 600 }
const steps = (hours: number) => (hours * 3600) / STEP_S + 1
const level = (hours: number) => new Float64Array(steps(hours)).fill(420)
const zone = (plan: Partial<ZonePlan>): ZonePlan => ({
  volumeM3: 180,
  stays: [],
  outdoorRate: [{ fromS: FROM_S, perHour: 3 }],
  wander: still,
  ...plan,
})
const excessAt = (plans: ZonePlan[], hours: number) =>
  integrate(plans, FROM_S, level(hours), randomFrom('test')).map((z) => z.co2Ppm.at(-1)! - 420)

describe('the truth the inference is judged by', () => {
  it('fills a room as the mass balance says: V 180 m3, 3/h, 25 people at 0.0048 L/s (T18, derived)', () => {
    const stays = [{ fromS: FROM_S, toS: FROM_S + 7200, generationLps: 25 * 0.0048, persons: 25 }]
    expect(420 + excessAt([zone({ stays, startPpm: 420 })], 1)[0]!).toBeCloseTo(1180.17, 2)
  })

  it('empties two rooms that exchange air with the rates 2 and 8 per hour (T49, derived)', () => {
    const rate = [{ fromS: FROM_S, perHour: 2 }]
    const both = [
      zone({
        outdoorRate: rate,
        exchange: { zone: 1, rate: [{ fromS: FROM_S, perHour: 5 }] },
        startPpm: 1220,
      }),
      zone({
        outdoorRate: rate,
        exchange: { zone: 0, rate: [{ fromS: FROM_S, perHour: 1 }] },
        startPpm: 420,
      }),
    ]
    const [room, hall] = excessAt(both, 1)
    expect(Math.abs(room! / 18.26835 - 1)).toBeLessThan(2e-3)
    // both excesses weighted by volume fall at 2 per hour: 60 x 800 exp(-2)
    expect(Math.abs((60 * room! + 300 * hall!) / (60 * 800 * Math.exp(-2)) - 1)).toBeLessThan(2e-3)
  })

  it('lets the rate fall with CO2 under demand control (T50, derived)', () => {
    const plan = zone({
      outdoorRate: [{ fromS: FROM_S, perHour: 0.5 }],
      demand: { perHourPerPpm: 2.5 / 800, ceilingPerHour: 99 },
      startPpm: 1220,
    })
    expect(Math.abs(excessAt([plan], 1)[0]! / 163.521 - 1)).toBeLessThan(5e-3)
  })

  it('knows both clock changes of Berlin (T52, from the zone data)', () => {
    const hours = (date: string) =>
      (localTimeS('Europe/Berlin', date, 3.5) - localTimeS('Europe/Berlin', date, 1.5)) / 3600
    expect(hours('2026-10-25')).toBe(3)
    expect(hours('2026-03-29')).toBe(1)
    expect(localDate('Europe/Lisbon', Date.UTC(2026, 6, 1, 23, 30) / 1000)).toBe('2026-07-02')
  })

  it('draws the same building from the same seed, and the same first room whatever the number of rooms', () => {
    const order = { className: 'cleaners', seed: 7, part: 0, rooms: 2, days: 1, outdoor: true }
    const first = makeBuilding(order)
    expect(makeBuilding(order).rooms[1]!.readings).toEqual(first.rooms[1]!.readings)
    expect(makeBuilding({ ...order, rooms: 1 }).rooms[0]!.readings).toEqual(first.rooms[0]!.readings)
    expect(makeBuilding({ ...order, seed: 8 }).rooms[0]!.readings).not.toEqual(first.rooms[0]!.readings)
  })

  it('has weather outdoors that stays near its level', () => {
    const air = outdoorAir(FROM_S, 86_400 / STEP_S, 430, randomFrom('weather'))
    expect(Math.min(...air)).toBeGreaterThan(395)
    expect(Math.max(...air)).toBeLessThan(465)
  })
})

describe('the judge', () => {
  const building = makeBuilding({
    className: 'shut-off',
    seed: 3,
    part: 0,
    rooms: 1,
    days: 2,
    outdoor: false,
  })
  const room = building.rooms[0]!
  const leaveS = room.draft.lastLeaveS[1]!
  const spell = room.spells.find((s) => Math.abs(s.fromS - leaveS) < 150)!
  const answer = (fromS: number, toS: number, ach: number): Answer => ({
    room: room.id,
    night: localDate(building.zone, fromS),
    start: isoZ(fromS),
    end: isoZ(toS),
    kind: 'fit',
    ach,
    ach_low: ach * 0.95,
    ach_high: ach * 1.05,
    quality: 'accepted',
    reasons: [],
  })
  const verdictOf = (a: Answer) => judge(building, [a]).verdicts[0]!

  it('accepts a right figure inside one rate and links it to its evening', () => {
    const verdict = verdictOf(answer(spell.fromS + 300, spell.steadyToS, spell.outdoorPerHour))
    expect(verdict.covered).toBe(true)
    expect(verdict.falseAccept).toBe(false)
    expect(verdict.evening?.spell).toBe(spell)
  })

  it('calls a figure across the change of rate a false accept when it is over 20 % off', () => {
    const mixed = verdictOf(answer(spell.fromS + 300, spell.toS - 3600, spell.outdoorPerHour))
    expect(mixed.mixed).toBe(true)
    expect(mixed.falseAccept).toBe(true)
  })

  it('sees people inside the window', () => {
    const verdict = verdictOf(answer(spell.fromS - 3600, spell.fromS + 600, spell.outdoorPerHour * 0.4))
    expect(verdict.people).toBe(true)
    expect(verdict.falseAccept).toBe(true)
  })
})

describe('the rivals', () => {
  // data D2 of the method notes: every 5 min, background 420 ppm
  const d2 = [
    1220, 1150, 1084, 1023, 973, 910, 859, 809, 773, 747, 715, 690, 652, 633, 608, 603, 590, 578, 560, 549,
    539, 523, 509, 500, 489,
  ].map((ppm, i) => ({ trueS: i * 300, clockS: i * 300, ppm }))

  it('textbook line: A 1.186383, standard error 0.0126040 (T8, derived)', () => {
    const line = logLine(d2, 420)
    expect(-line.slope).toBeCloseTo(1.186383, 5)
    expect(line.standardError).toBeCloseTo(0.012604, 5)
  })

  it('nonlinear fit with the background held: A 1.198467 (T12, derived)', () => {
    expect(fitDecay(d2, 420, 1e-4)!.rate).toBeCloseTo(1.198467, 4)
  })

  it('Student quantiles within 0.2 % of the tables: 2.7764 (4), 2.2010 (11), 2.0423 (30)', () => {
    for (const [degrees, t] of [
      [4, 2.7764],
      [11, 2.201],
      [30, 2.0423],
    ] as const)
      expect(Math.abs(studentQuantile975(degrees) / t - 1)).toBeLessThan(2e-3)
  })
})

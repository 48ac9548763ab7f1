/** What must not change a rate: the sensor's zero and gain, the date, the order of the readings, doubled readings, a lone spike. */
import { describe, expect, it } from 'vitest'
import { analyseBuildingDay } from '@/lib/air/analyse-building'
import { refitDecay } from '@/lib/air/decay/refit'
import type { Decay, RoomSpec, Series } from '@/lib/air/types'
import { GENERATOR_START_S, generateRoom } from './support/rooms'
import { dayWindow } from './support/score'

const DAY_S = GENERATOR_START_S + 86_400
const room = generateRoom('clean', 3)
const series = dayWindow(room, DAY_S)

function analyse(changed: Series, spec: Partial<RoomSpec> = {}, dayStartS = DAY_S): Decay[] {
  const date = new Date(dayStartS * 1000).toISOString().slice(0, 10)
  const rooms = [{ room: { id: 'r', volumeM3: room.volumeM3, ...spec }, series: changed }]
  return analyseBuildingDay({ timeZone: 'UTC', date, dayStartS, dayEndS: dayStartS + 86_400, rooms })[0]!
    .decays
}

function evening(decays: readonly Decay[]): Decay {
  const given = decays.filter((decay) => decay.quality === 'accepted')
  return given[given.length - 1]!
}

const base = evening(analyse(series))
const mapPpm = (change: (ppm: number, i: number) => number): Series => ({
  ...series,
  co2Ppm: series.co2Ppm.map(change),
})

describe('a rate does not depend on', () => {
  it('the sensor’s zero', () => {
    const moved = evening(analyse(mapPpm((ppm) => ppm + 37)))
    expect(moved.airChangeRatePerHour!).toBeCloseTo(base.airChangeRatePerHour!, 2)
    expect(moved.background!.ppm - base.background!.ppm).toBeCloseTo(37, 0)
  })

  it('the sensor’s gain, to half the interval', () => {
    const scaled = evening(analyse(mapPpm((ppm) => 400 + 1.1 * (ppm - 400))))
    const half = (base.airChangeRateHighPerHour! - base.airChangeRateLowPerHour!) / 4
    expect(Math.abs(scaled.airChangeRatePerHour! - base.airChangeRatePerHour!)).toBeLessThan(half)
  })

  it('the date', () => {
    const week = 7 * 86_400
    const later = evening(analyse({ ...series, timeS: series.timeS.map((t) => t + week) }, {}, DAY_S + week))
    expect(later.airChangeRatePerHour!).toBeCloseTo(base.airChangeRatePerHour!, 6)
    expect(later.startS - base.startS).toBe(week)
  })

  it('the order of the readings, nor on readings sent twice', () => {
    const order = Array.from(series.timeS.keys()).sort((a, b) => ((a * 7919) % 2311) - ((b * 7919) % 2311))
    const doubled = [...order, ...order.slice(0, 500)]
    const shuffled = {
      timeS: Float64Array.from(doubled, (i) => series.timeS[i]!),
      co2Ppm: Float64Array.from(doubled, (i) => series.co2Ppm[i]!),
    }
    expect(evening(analyse(shuffled)).airChangeRatePerHour).toBe(base.airChangeRatePerHour)
  })

  it('lone spikes', () => {
    const spiked = mapPpm((ppm, i) => (i % 211 === 5 ? ppm + 900 : ppm))
    expect(evening(analyse(spiked)).airChangeRatePerHour!).toBeCloseTo(base.airChangeRatePerHour!, 1)
  })
})

describe('what a room is', () => {
  it('a recirculating room is doubtful and its outdoor share open', () => {
    const decay = analyse(series, { air: 'recirculating' }).find((d) => d.startS === base.startS)!
    expect(decay.quality).toBe('doubtful')
    expect(decay.reasons).toContain('recirculation-possible')
    expect(decay.outdoorRateLowPerHour).toBe(0)
  })

  it('an outdoor-air room carries no such reason, an unknown one does', () => {
    expect(evening(analyse(series, { air: 'outdoor' })).reasons).toEqual([])
    expect(base.reasons).toEqual(['recirculation-possible'])
  })

  it('mean age is sixty over the rate', () => {
    expect(base.meanAgeMin!).toBeCloseTo(60 / base.airChangeRatePerHour!, 9)
  })
})

describe('refit under the hand', () => {
  it('gives the same rate for the same window within its interval, and follows the window', () => {
    const refit = refitDecay({ series, fromS: base.startS, toS: base.endS, background: base.background })
    expect(refit.quality).not.toBe('refused')
    expect(refit.ratePerHour!).toBeGreaterThan(base.airChangeRateLowPerHour!)
    expect(refit.ratePerHour!).toBeLessThan(base.airChangeRateHighPerHour!)
  })

  it('refuses a window that is too short or holds nothing, in words', () => {
    const short = refitDecay({ series, fromS: base.startS, toS: base.startS + 60, background: null })
    expect(short).toMatchObject({ quality: 'refused', ratePerHour: null, reasons: ['too-short'] })
    expect(short.sentence).toMatch(/^No figure/)
    const empty = refitDecay({
      series: { timeS: new Float64Array(), co2Ppm: new Float64Array() },
      fromS: 0,
      toS: 7200,
      background: null,
    })
    expect(empty.reasons).toContain('too-few-points')
  })
})

describe('bad records never throw', () => {
  const none = { timeS: new Float64Array(), co2Ppm: new Float64Array() }
  it.each([
    ['nothing at all', none],
    ['one reading', { timeS: Float64Array.of(DAY_S), co2Ppm: Float64Array.of(800) }],
    ['not-a-number', mapPpm(() => Number.NaN)],
    ['one value for ever', mapPpm(() => 612)],
    ['zeros', mapPpm(() => 0)],
  ])('%s', (_, record) => {
    expect(analyse(record).filter((decay) => decay.quality !== 'refused')).toEqual([])
  })
})

import { describe, expect, it } from 'vitest'
import type { NewFinding } from '@/db/changes/findings'
import type { NewRoomWeek } from '@/db/changes/weeks'
import type { BuildingPlan } from '@/db/queries/building-plan'
import type { Carried, NightRun } from '@/db/queries/nights'
import { withoutEarlyStops } from '@/ingest/nightly/judge/early-stops'
import type { JudgedEstimate } from '@/ingest/nightly/judge/estimates'
import { type FindingInput, findAll } from '@/ingest/nightly/judge/findings'
import { addDays } from '@/lib/time'

const LAST = '2026-06-12'
const nights = (count: number) => Array.from({ length: count }, (_, i) => addDays(LAST, i + 1 - count))
const weekday = (date: string) => ![0, 6].includes(new Date(`${date}T00:00:00Z`).getUTCDay())
const at = (date: string, clock: string) => new Date(`${date}T${clock}:00Z`)

const room = (id: number, name: string, airHandlerId: number | null) => ({
  id,
  name,
  kind: 'room',
  airHandlerId,
  neighbourRoomId: id === 1 ? 2 : null,
})
const plan = {
  building: { id: 1, organizationId: 1, timeZone: 'UTC' },
  rooms: [room(1, 'Alder', 1), room(2, 'Birch', 1), room(3, 'Cedar', 2)],
  airHandlers: [
    { id: 1, name: 'First floor supply' },
    { id: 2, name: 'Second floor supply' },
  ],
  hours: [1, 2].map((airHandlerId) => ({
    purpose: 'supply',
    airHandlerId,
    days: [1, 2, 3, 4, 5],
    fromLocal: '07:00',
    toLocal: '19:00',
  })),
  closures: [],
  sensors: [1, 2, 3, 4, 5, 6].map((id) => ({ id, label: `sensor ${id}` })),
  placements: [1, 2, 3, 4, 5, 6].map((id) => ({ sensorId: id, roomId: id <= 3 ? id : null, toAt: null })),
} as unknown as BuildingPlan

function estimate(
  roomId: number,
  night: string,
  from: string,
  to: string,
  more: Partial<JudgedEstimate> = {},
): JudgedEstimate {
  const ratePerHour = more.airChangeRatePerHour ?? 3
  return {
    ...{
      roomId,
      night,
      decayId: 0,
      startAt: at(night, from),
      endAt: at(night, to),
      rateChangeAt: null,
      kind: 'fit',
      quality: 'accepted',
    },
    ...{
      mode: 'supply on',
      modeFrom: 'schedule',
      reasons: [],
      uncertaintyParts: null,
      backgroundOrigin: 'own record',
      review: null,
    },
    ...{
      airChangeRatePerHour: ratePerHour,
      airChangeRateLowPerHour: 0.9 * ratePerHour,
      airChangeRateHighPerHour: 1.1 * ratePerHour,
    },
    ...{ outdoorRateLowPerHour: null, outdoorRateHighPerHour: null },
    ...more,
  }
}

/** A decay whose rate falls at a clock: two estimates that share the instant. */
const slowing = (roomId: number, night: string, clock: string) => [
  estimate(roomId, night, '17:00', clock, { rateChangeAt: at(night, clock) }),
  estimate(roomId, night, clock, '22:00', { airChangeRatePerHour: 0.3, mode: 'supply off' }),
]

const run = (localDate: string, carried: Carried): NightRun => ({
  localDate,
  inputHash: localDate,
  provisional: false,
  finishedAt: at(localDate, '12:00'),
  carried,
})
const find = (more: Partial<FindingInput>) =>
  findAll({ plan, lastNight: LAST, runs: [], estimates: [], verdicts: [], methodVersion: 'test', ...more })

describe('supply stopped early', () => {
  const stops = (clock: string, rooms: number[], count = 10) =>
    nights(count)
      .filter(weekday)
      .flatMap((night) => rooms.flatMap((id) => slowing(id, night, clock)))
      .sort((a, b) => a.roomId - b.roomId || +a.startAt - +b.startAt)

  it('is found where two rooms slow down together before the entered end', () => {
    const [finding, ...others] = find({ estimates: stops('17:31', [1, 2]) })
    expect(others).toEqual([])
    expect(finding).toMatchObject({
      kind: 'supply stopped early',
      ...{ airHandlerId: 1, roomId: null, nights: 8, lastNight: LAST },
      detail: { stopsAt: '17:30', enteredEnd: '19:00', minutesEarly: 89, rooms: [1, 2] },
      sentence:
        'First floor supply stops at about 17:30, though its hours say 19:00: its rooms slowed down together on 8 nights.',
    })
  })

  it('is not found at the entered end, in one room alone, on two nights, or at clocks that scatter', () => {
    expect(find({ estimates: stops('18:55', [1, 2]) })).toEqual([])
    expect(find({ estimates: stops('17:31', [1]) })).toEqual([])
    expect(find({ estimates: stops('17:31', [1, 2], 2) })).toEqual([])
    const scattered = nights(10)
      .filter(weekday)
      .flatMap((night, i) => slowing(1 + (i % 2), night, `${10 + i}:00`))
    expect(
      find({ estimates: scattered.sort((a, b) => a.roomId - b.roomId || +a.startAt - +b.startAt) }),
    ).toEqual([])
  })

  it('is no more found when it was last seen weeks ago', () => {
    const old = stops('17:31', [1, 2], 28).filter((one) => one.night < '2026-05-30')
    expect(find({ estimates: old })).toEqual([])
  })
})

describe('ventilated while empty', () => {
  const evenings = (to: string, rate = 3) =>
    nights(12)
      .filter(weekday)
      .map((night) => estimate(3, night, '18:30', to, { airChangeRatePerHour: rate }))

  it('is found where decays go on at the rate of the day after the hours', () => {
    expect(find({ estimates: evenings('20:30') })).toMatchObject([
      { kind: 'ventilated while empty', roomId: 3, airHandlerId: 2 },
    ])
  })

  it('is not found where they end with the hours, nor in a room that merely leaks', () => {
    expect(find({ estimates: evenings('19:10') })).toEqual([])
    expect(find({ estimates: evenings('23:00', 0.5) })).toEqual([])
  })
})

describe('too small for its use', () => {
  const days = (peakPpm: number, overMin: number) =>
    nights(14)
      .filter(weekday)
      .map((night) =>
        run(night, {
          days: {
            1: {
              outdoorPpm: 430,
              limitPpm: 1230,
              peakPpm,
              peakAtS: 0,
              overMin,
              occupiedMin: 600,
              coveredMin: 600,
            },
          },
        }),
      )
  const verdict = (more: Partial<NewRoomWeek>) => [
    { roomId: 1, verdict: 'meets basis', flowLowLps: 60, designHeadcount: 6, ...more } as NewRoomWeek,
  ]

  it('reckons the least number of people from flow and level', () => {
    // 60 L/s × 1100 ppm / (20 L/h per person) = 11.88 persons
    const [finding] = find({ runs: days(1530, 60), verdicts: verdict({}) })
    expect(finding).toMatchObject({
      kind: 'too small for its use',
      roomId: 1,
      nights: 10,
      detail: { personsAtLeast: 11, designHeadcount: 6 },
    })
  })

  it('is not found in a room short of its basis, under its limit, or used by as many as planned', () => {
    expect(find({ runs: days(1530, 60), verdicts: verdict({ verdict: 'short of basis' }) })).toEqual([])
    expect(find({ runs: days(1530, 10), verdicts: verdict({}) })).toEqual([])
    expect(find({ runs: days(1530, 60), verdicts: verdict({ designHeadcount: 10 }) })).toEqual([])
    expect(find({ runs: days(1530, 60), verdicts: verdict({ flowLowLps: null }) })).toEqual([])
  })
})

describe('air from neighbour', () => {
  it('is found where decays say so on several nights', () => {
    const coupled = nights(6).map((night) =>
      estimate(1, night, '17:00', '18:30', { reasons: ['neighbour-coupled'], quality: 'doubtful' }),
    )
    expect(find({ estimates: coupled })).toMatchObject([
      { kind: 'air from neighbour', roomId: 1, nights: 6, detail: { neighbourRoomId: 2 } },
    ])
    expect(find({ estimates: coupled.slice(0, 3) })).toEqual([])
  })
})

describe('sensor drifting', () => {
  const floor = (ppm: number) => ({ ppm }) as NonNullable<Carried['quietFloors']>[string]
  /** Six sensors; outdoor air wanders by 20 ppm for all of them, sensor 3 goes its own way. */
  const runs = (own: (night: number) => number, count = 42) =>
    nights(count).map((night, i) => {
      const air = 430 + 20 * Math.sin(i) + 3 * ((i * 7) % 5)
      return run(night, {
        quietFloors: Object.fromEntries(
          [1, 2, 3, 4, 5, 6].map((id) => [id, floor(air + 2 * id + (id === 3 ? own(i) : 0))]),
        ),
      })
    })

  it('is found against fellows, not against the weather', () => {
    const [finding, ...others] = find({ runs: runs((i) => -1.5 * i) })
    expect(others).toEqual([])
    expect(finding).toMatchObject({ kind: 'sensor drifting', roomId: 3, detail: { sensorId: 3 } })
    expect((finding!.detail as { driftPpm: number }).driftPpm).toBeCloseTo(-1.5 * 41, 0)
  })

  it('is not found in a steady sensor, after a few nights, or where it is within the accuracy', () => {
    expect(find({ runs: runs(() => -60) })).toEqual([])
    expect(find({ runs: runs((i) => -3 * i, 10) })).toEqual([])
    expect(find({ runs: runs((i) => -0.4 * i) })).toEqual([])
  })
})

describe('estimates of an air handler that stops early', () => {
  const night = '2026-06-11'
  const early = [
    { kind: 'supply stopped early', airHandlerId: 1, firstNight: '2026-06-08', detail: { stopsAt: '17:30' } },
  ] as unknown as NewFinding[]
  const modeOf = (one: JudgedEstimate) => withoutEarlyStops(plan, [one], early)[0]!.mode

  it('lose the schedule’s word for what lies after the stop, and for nothing else', () => {
    expect(modeOf(estimate(1, night, '17:40', '18:40'))).toBe('unknown')
    expect(modeOf(estimate(1, night, '17:00', '18:00'))).toBe('unknown')
    expect(modeOf(estimate(1, night, '16:30', '17:35'))).toBe('supply on')
    expect(modeOf(estimate(1, night, '12:00', '13:00'))).toBe('supply on')
    // another air handler, an earlier night, and a mode that was measured
    expect(modeOf(estimate(3, night, '17:40', '18:40'))).toBe('supply on')
    expect(modeOf(estimate(1, '2026-06-05', '17:40', '18:40'))).toBe('supply on')
    expect(modeOf(estimate(1, night, '17:40', '18:40', { modeFrom: 'status' }))).toBe('supply on')
    expect(modeOf(estimate(1, night, '17:40', '18:40', { modeFrom: 'inferred' }))).toBe('supply on')
  })
})

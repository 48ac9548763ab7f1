import type { Knot, ZonePlan } from './air'
import { localTimeS } from './calendar'
import { dayOfPeople, type RoomUse, type Stay } from './people'
import type { Random } from './random'
import { type Flaws, NO_FLAWS, type SensorPlan, SOUND_SENSOR } from './sensor'

/** What a class of rooms is drawn from: the building's calendar and the room's own random stream. */
export type Setting = { random: Random; zone: string; dates: string[]; fromS: number; index: number }

export type Draft = {
  use: RoomUse
  volumeM3: number
  persons: number
  ratePerHour: number
  /** per day: when the last occupant leaves */
  lastLeaveS: number[]
  stays: Stay[]
  outdoorRate: Knot[]
  demand?: ZonePlan['demand']
  wander: ZonePlan['wander']
  neighbour?: { plan: ZonePlan; rate: Knot[]; measured: boolean }
  sensor: SensorPlan
  flaws: Flaws
  /** optional fields of rooms.json */
  declared: Record<string, unknown>
}

export type Wish = {
  rate?: [number, number]
  /** steady excess that the people would reach, ppm */
  excess?: [number, number]
  uses?: RoomUse[]
  leaveHour?: [number, number]
  intervals?: number[]
  weekendEmpty?: boolean
  /** the supply is set back late in the evening in three rooms of ten unless false */
  setBack?: boolean
  volume?: [number, number]
  sensor?: Partial<SensorPlan>
}

function leaveTimes(setting: Setting, hours: [number, number]): number[] {
  const usual = setting.random.uniform(...hours)
  return setting.dates.map((date) =>
    localTimeS(setting.zone, date, usual + Math.max(-1, Math.min(1, setting.random.normal(0, 0.4)))),
  )
}

function peopleOf(setting: Setting, wish: Wish, use: RoomUse, persons: number, lastLeaveS: number[]): Stay[] {
  const habit = {
    zone: setting.zone,
    use,
    persons,
    lastLeaveHour: 0,
    leaveSpreadHours: setting.random.uniform(0.1, 1.2),
    weekendEmpty: wish.weekendEmpty ?? false,
  }
  return setting.dates.flatMap((date, d) =>
    dayOfPeople(habit, date, lastLeaveS[d]!, setting.random.fork(`people ${d}`)),
  )
}

/** Constant supply, or one set back to 10–40 % between a late hour and 06:00, the same hour every day. */
function supplyKnots(
  setting: Setting,
  ratePerHour: number,
  setBack: boolean,
): { knots: Knot[]; stopHour: number | null } {
  const knots: Knot[] = [{ fromS: setting.fromS, perHour: ratePerHour }]
  if (!setBack) return { knots, stopHour: null }
  const stopHour = setting.random.integer(43, 46) / 2
  const low = ratePerHour * setting.random.uniform(0.1, 0.4)
  for (const date of setting.dates) {
    knots.push({ fromS: localTimeS(setting.zone, date, 6), perHour: ratePerHour })
    knots.push({ fromS: localTimeS(setting.zone, date, stopHour), perHour: low })
  }
  knots[0] = { fromS: setting.fromS, perHour: low }
  return { knots, stopHour }
}

const clockOf = (hour: number) =>
  `${String(Math.floor(hour)).padStart(2, '0')}:${String(Math.round((hour % 1) * 60)).padStart(2, '0')}`

/** A sound sensor of middling quality: small gain and offset errors that nobody told the analysis. */
function usualSensor(random: Random, wish: Wish): SensorPlan {
  return {
    ...SOUND_SENSOR,
    intervalS: random.pick(wish.intervals ?? [60, 60, 60, 120, 300]),
    lagS: random.uniform(20, 90),
    gain: random.uniform(0.97, 1.03),
    offsetPpm: random.uniform(-25, 25),
    whitePpm: random.uniform(1.5, 5),
    mixingShare: random.uniform(0.004, 0.012),
    mixingS: random.uniform(180, 600),
    ...wish.sensor,
  }
}

/** An ordinary room with people in it, ready for a class to make it hard. */
export function draftRoom(setting: Setting, wish: Wish = {}): Draft {
  const { random } = setting
  const use = random.pick(wish.uses ?? (['office', 'office', 'meeting', 'classroom'] as const))
  const ratePerHour = random.logUniform(...(wish.rate ?? [0.5, 4]))
  const volumeM3 = random.uniform(...(wish.volume ?? [35, 220]))
  const excessPpm = random.uniform(...(wish.excess ?? [450, 1300]))
  const persons = Math.max(1, Math.round((excessPpm * ratePerHour * volumeM3) / 3.6e6 / 0.0048))
  const lastLeaveS = leaveTimes(setting, wish.leaveHour ?? [16.5, 19])
  const { knots, stopHour } = supplyKnots(setting, ratePerHour, wish.setBack !== false && random.chance(0.3))
  const declared: Record<string, unknown> = {}
  if (random.chance(0.4)) declared.air = 'outdoor'
  if (stopHour !== null && random.chance(0.5))
    declared.supply_hours = [{ days: [1, 2, 3, 4, 5, 6, 7], from: '06:00', to: clockOf(stopHour) }]
  if (random.chance(0.3)) declared.sensor = { accuracy_ppm: 30, accuracy_pct: 3, resolution_ppm: 1 }
  return {
    use,
    volumeM3,
    persons,
    ratePerHour,
    lastLeaveS,
    stays: peopleOf(setting, wish, use, persons, lastLeaveS),
    outdoorRate: knots,
    wander: { sd: random.uniform(0.005, 0.025), correlationS: random.uniform(600, 3600) },
    sensor: usualSensor(random, wish),
    flaws: { ...NO_FLAWS, missing: [], stuck: [], clock: [] },
    declared,
  }
}

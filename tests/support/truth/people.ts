import { localTimeS, weekday } from './calendar'
import type { Random } from './random'

/** One person's (or one group's) stay in a room. CO2 generation in L/s at room conditions. */
export type Stay = { fromS: number; toS: number; generationLps: number; persons: number }

export type RoomUse = 'office' | 'meeting' | 'classroom'

export type DayHabit = {
  zone: string
  use: RoomUse
  persons: number
  /** local hour about which the last person leaves */
  lastLeaveHour: number
  /** spread of departures before the last, hours */
  leaveSpreadHours: number
  weekendEmpty: boolean
}

/** CO2 of one seated adult: about 0.0048 L/s, 15 % from person to person (Persily & de Jonge 2017, rounded). */
const oneAdultLps = (random: Random) => Math.max(0.003, random.normal(0.0048, 0.0007))

function officeDay(habit: DayHabit, date: string, lastS: number, random: Random): Stay[] {
  const stays: Stay[] = []
  const at = (hours: number) => localTimeS(habit.zone, date, hours)
  for (let person = 0; person < habit.persons; person++) {
    if (person > 0 && random.chance(0.08)) continue
    const generationLps = oneAdultLps(random)
    const inS = at(8.6 + random.normal(0, 0.5))
    const outS = person === 0 ? lastS : lastS - random.uniform(0, habit.leaveSpreadHours) * 3600
    const lunchFromS = at(12 + random.normal(0.2, 0.25))
    const lunchToS = lunchFromS + random.uniform(0.4, 1) * 3600
    stays.push({ fromS: inS, toS: Math.min(lunchFromS, outS), generationLps, persons: 1 })
    if (outS > lunchToS) stays.push({ fromS: lunchToS, toS: outS, generationLps, persons: 1 })
  }
  return stays
}

function blocksDay(blocks: [number, number][], persons: number, raggedS: number, random: Random): Stay[] {
  const stays: Stay[] = []
  for (const [fromS, toS] of blocks) {
    for (let person = 0; person < persons; person++) {
      const generationLps = oneAdultLps(random)
      const late = Math.abs(random.normal(0, raggedS))
      const early = person === 0 ? 0 : Math.abs(random.normal(0, raggedS))
      if (toS - early > fromS + late)
        stays.push({ fromS: fromS + late, toS: toS - early, generationLps, persons: 1 })
    }
  }
  return stays
}

function meetingDay(habit: DayHabit, date: string, lastS: number, random: Random): Stay[] {
  const blocks: [number, number][] = []
  let hour = 9 + random.uniform(0, 0.6)
  while (localTimeS(habit.zone, date, hour + 2.2) < lastS - 5400) {
    const length = random.uniform(0.5, 1.8)
    blocks.push([localTimeS(habit.zone, date, hour), localTimeS(habit.zone, date, hour + length)])
    hour += length + random.uniform(0.3, 2)
  }
  blocks.push([lastS - random.uniform(1, 2) * 3600, lastS])
  return blocksDay(blocks, Math.max(2, Math.round(habit.persons * random.uniform(0.6, 1))), 90, random)
}

function classDay(habit: DayHabit, date: string, lastS: number, random: Random): Stay[] {
  const blocks: [number, number][] = []
  for (const [from, to] of [
    [8.25, 9.75],
    [10, 11.5],
    [11.75, 12.75],
  ] as const)
    blocks.push([localTimeS(habit.zone, date, from), localTimeS(habit.zone, date, to)])
  blocks.push([Math.max(localTimeS(habit.zone, date, 13.75), lastS - 2.5 * 3600), lastS])
  return blocksDay(blocks, habit.persons, 60, random)
}

/** One day of people in a room: arrivals and departures one by one, lunch, meetings or lessons; the last leaves at `lastS`. */
export function dayOfPeople(habit: DayHabit, date: string, lastS: number, random: Random): Stay[] {
  if (habit.weekendEmpty && weekday(date) > 5) return []
  if (habit.use === 'office') return officeDay(habit, date, lastS, random)
  if (habit.use === 'meeting') return meetingDay(habit, date, lastS, random)
  return classDay(habit, date, lastS, random)
}

/** Cleaners: one or two, at work (about 0.008 L/s each, 2 met), for 10 to 30 minutes. */
export function cleaners(fromS: number, random: Random): Stay {
  const persons = random.integer(1, 2)
  return { fromS, toS: fromS + random.uniform(600, 1800), generationLps: 0.008 * persons, persons }
}

/** A guard looks in for 1 to 5 minutes, walking (about 0.012 L/s). */
export function guardRound(fromS: number, random: Random): Stay {
  return { fromS, toS: fromS + random.uniform(60, 300), generationLps: 0.012, persons: 1 }
}

/** A room that is never empty: shifts of varying size hand over with an overlap. */
export function shifts(zone: string, date: string, persons: number, random: Random): Stay[] {
  const stays: Stay[] = []
  for (const [from, to, share] of [
    [6, 14.2, 1],
    [14, 22.2, 0.8],
    [22, 30.2, 0.35],
  ] as const) {
    const heads = Math.max(1, Math.round(persons * share * random.uniform(0.8, 1.1)))
    for (let i = 0; i < heads; i++) {
      const fromS = localTimeS(zone, date, from + (i === 0 ? 0 : random.normal(0, 0.1)))
      const toS = localTimeS(zone, date, to + (i === 0 ? 0.1 : random.normal(0, 0.1)))
      const awayS = fromS + random.uniform(3, 4.5) * 3600
      const generationLps = oneAdultLps(random)
      if (i === 0) stays.push({ fromS, toS, generationLps, persons: 1 })
      else {
        stays.push({ fromS, toS: awayS, generationLps, persons: 1 })
        stays.push({ fromS: awayS + 2400, toS, generationLps, persons: 1 })
      }
    }
  }
  return stays
}

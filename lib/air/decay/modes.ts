/** Which ventilation state an estimate speaks for, and how that is known: status signal, fellows on the same air handler, schedule. */
import type { Mode, ModeOrigin, RoomSpec, SupplyChange, SupplyHours } from '@/lib/air/types'
import { addDays, isoWeekday, localDate, localToEpochS } from '@/lib/time'

export type Moded = { mode: Mode; modeFrom: ModeOrigin | null }
/** An instant at which the supply of an air handler fell, from the decays of its rooms. */
export type SupplyStop = {
  atS: number
  lowS: number
  highS: number
  rooms: number
  to: 'supply off' | 'supply reduced'
}

/** The scheduled supply between two instants as a list of on-periods in epoch seconds. */
export function scheduledPeriods(
  hours: readonly SupplyHours[],
  fromS: number,
  toS: number,
  timeZone: string,
) {
  const periods: { fromS: number; toS: number }[] = []
  const last = addDays(localDate(toS, timeZone), 1)
  for (let date = addDays(localDate(fromS, timeZone), -1); date <= last; date = addDays(date, 1)) {
    for (const entry of hours) {
      if (!entry.days.includes(isoWeekday(date))) continue
      const end = entry.to <= entry.from ? addDays(date, 1) : date
      const endClock = entry.to === '24:00' ? '23:59:59' : entry.to
      periods.push({
        fromS: localToEpochS(date, entry.from, timeZone),
        toS: localToEpochS(end, endClock, timeZone),
      })
    }
  }
  return periods
}

/** Seconds of a window for which the schedule has the supply on. */
export function scheduledOnSeconds(
  hours: readonly SupplyHours[],
  fromS: number,
  toS: number,
  timeZone: string,
): number {
  let on = 0
  for (const period of scheduledPeriods(hours, fromS, toS, timeZone)) {
    on += Math.max(0, Math.min(toS, period.toS) - Math.max(fromS, period.fromS))
  }
  return on
}

/** What the schedule says of a window: on, off, or null when the window lies across a change by more than a fifth on both sides. */
export function scheduledMode(
  hours: readonly SupplyHours[],
  fromS: number,
  toS: number,
  timeZone: string,
): Mode | null {
  const share = scheduledOnSeconds(hours, fromS, toS, timeZone) / Math.max(1, toS - fromS)
  if (share >= 0.8) return 'supply on'
  return share <= 0.2 ? 'supply off' : null
}

/** An early or late stop must last this long to contradict the schedule, seconds. */
const DISAGREES_S = 1800

function contradicts(
  inferred: Mode,
  hours: readonly SupplyHours[],
  fromS: number,
  toS: number,
  timeZone: string,
): boolean {
  const on = scheduledOnSeconds(hours, fromS, toS, timeZone)
  return inferred === 'supply on'
    ? toS - fromS - on > Math.max(DISAGREES_S, 0.5 * (toS - fromS))
    : on > DISAGREES_S
}

/** What a status signal says of a window; null when it says nothing or changes well inside the window. */
export function statusMode(changes: readonly SupplyChange[], fromS: number, toS: number): Mode | null {
  const seconds = { on: 0, reduced: 0, off: 0 }
  const sorted = [...changes].sort((a, b) => a.timeS - b.timeS)
  sorted.forEach((change, i) => {
    const end = sorted[i + 1]?.timeS ?? Number.POSITIVE_INFINITY
    seconds[change.state] += Math.max(0, Math.min(toS, end) - Math.max(fromS, change.timeS))
  })
  const total = toS - fromS
  for (const state of ['on', 'reduced', 'off'] as const)
    if (seconds[state] >= 0.85 * total) return `supply ${state}`
  return null
}

function inferredMode(stops: readonly SupplyStop[], fromS: number, toS: number): Mode | null {
  for (const stop of stops) {
    const slackS = 900
    if (toS <= stop.highS + slackS && fromS < stop.lowS) return 'supply on'
    if (fromS >= stop.lowS - slackS && fromS - stop.atS < 14 * 3600) return stop.to
  }
  return null
}

/** The mode of a window. Status beats everything; inference and schedule must agree where both speak, else the mode is unknown. */
export function modeOf(
  room: RoomSpec,
  window: { fromS: number; toS: number },
  known: { supply?: readonly SupplyChange[]; stops: readonly SupplyStop[]; timeZone: string },
): Moded & { disagrees: boolean } {
  if (room.air === 'natural') return { mode: 'natural', modeFrom: null, disagrees: false }
  const { fromS, toS } = window
  const status = known.supply && known.supply.length > 0 ? statusMode(known.supply, fromS, toS) : null
  if (status) return { mode: status, modeFrom: 'status', disagrees: false }
  const scheduled = room.supplyHours ? scheduledMode(room.supplyHours, fromS, toS, known.timeZone) : null
  const inferred = inferredMode(known.stops, fromS, toS)
  if (inferred && room.supplyHours && contradicts(inferred, room.supplyHours, fromS, toS, known.timeZone)) {
    return { mode: 'unknown', modeFrom: null, disagrees: true }
  }
  if (inferred) return { mode: inferred, modeFrom: 'inferred', disagrees: false }
  if (scheduled) return { mode: scheduled, modeFrom: 'schedule', disagrees: false }
  return { mode: 'unknown', modeFrom: null, disagrees: false }
}

export type RateDrop = {
  roomId: string
  atS: number
  lowS: number
  highS: number
  before: number
  after: number
}

/**
 * Finds the instants at which several rooms of one air handler slowed together: drops whose intervals, widened by five minutes, share an instant.
 * The shared time is their inverse-variance mean.
 */
export function sharedStops(drops: readonly RateDrop[]): SupplyStop[] {
  const stops: SupplyStop[] = []
  const sorted = [...drops].sort((a, b) => a.atS - b.atS)
  let group: RateDrop[] = []
  const close = () => {
    const rooms = new Set(group.map((drop) => drop.roomId)).size
    if (rooms >= 2) stops.push(joined(group, rooms))
    group = []
  }
  for (const drop of sorted) {
    const last = group[group.length - 1]
    const near =
      last && drop.atS - last.atS <= 300 + (drop.highS - drop.lowS) / 2 + (last.highS - last.lowS) / 2
    if (last && !(near && drop.atS - group[0]!.atS < 2400)) close()
    group.push(drop)
  }
  close()
  return stops
}

function joined(group: readonly RateDrop[], rooms: number): SupplyStop {
  let weight = 0
  let sum = 0
  let reduced = 0
  for (const drop of group) {
    const sd = Math.max(60, (drop.highS - drop.lowS) / 4)
    weight += 1 / sd ** 2
    sum += drop.atS / sd ** 2
    if (drop.after > 0.4 * drop.before && drop.after > 0.4) reduced++
  }
  const atS = sum / weight
  const sd = 1 / Math.sqrt(weight)
  return {
    atS,
    lowS: atS - 2 * sd,
    highS: atS + 2 * sd,
    rooms,
    to: reduced * 2 > group.length ? 'supply reduced' : 'supply off',
  }
}

export type EarlierStop = { date: string; clockS: number; to: SupplyStop['to'] }

/** How near in the day earlier stops must lie to count as one habit, seconds. */
const HABIT_S = 1200

/**
 * The hour at which an air handler was seen to stop on at least two of the last nights, as a stop of today: weaker than rooms that slow together
 * today, so its interval is a quarter of an hour wide on both sides.
 */
export function habitualStop(earlier: readonly EarlierStop[], dayStartS: number): SupplyStop | null {
  let best: readonly EarlierStop[] = []
  for (const stop of earlier) {
    const near = earlier.filter((other) => Math.abs(other.clockS - stop.clockS) <= HABIT_S)
    if (near.length > best.length) best = near
  }
  if (new Set(best.map((stop) => stop.date)).size < 2) return null
  const atS = dayStartS + best.reduce((sum, stop) => sum + stop.clockS, 0) / best.length
  const off = best.filter((stop) => stop.to === 'supply off').length
  const to = off * 2 >= best.length ? 'supply off' : 'supply reduced'
  return { atS, lowS: atS - 900, highS: atS + 900, rooms: 0, to }
}

import type { NewFinding } from '@/db/changes/findings'
import { median } from '@/lib/math/robust'
import { isoWeekday } from '@/lib/time'
import { supplyHoursAround } from '../../analysis/rooms'
import type { JudgedEstimate } from '../estimates'
import { clockMinutes, minutesOf, roundClock } from './clock'
import { type FindingInput, findingOf, sinceNight } from './types'

/** A fall of the rate by at least a quarter inside one decay is taken for a change of the supply. */
const LEAST_FALL = 0.75
/** Falls that share a wall clock this closely, on several nights and in several rooms, are one habit of the plant. */
const SAME_CLOCK_MIN = 15
const LEAST_NIGHTS = 3
const LEAST_ROOMS = 2
/** A stop this much before the entered end is early; less is a clock that runs ahead. */
const LEAST_EARLY_MIN = 20
const WITHIN_NIGHTS = 10

type Drop = { roomId: number; night: string; clockMin: number }

/** Instants inside decays at which a room's rate fell for good: two estimates that share the instant, the later one slower. */
function dropsOf(estimates: readonly JudgedEstimate[], timeZone: string): Drop[] {
  return estimates.flatMap((before, i) => {
    const after = estimates[i + 1]
    if (!after || after.roomId !== before.roomId || before.rateChangeAt === null) return []
    const shared = Math.abs(after.startAt.getTime() - before.rateChangeAt.getTime()) < 1000
    const was = before.airChangeRatePerHour ?? before.airChangeRateLowPerHour
    const is = after.airChangeRatePerHour ?? after.airChangeRateHighPerHour
    if (!shared || was === null || is === null || is > LEAST_FALL * was) return []
    return [
      { roomId: before.roomId, night: before.night, clockMin: clockMinutes(before.rateChangeAt, timeZone) },
    ]
  })
}

/** The largest group of drops around one wall clock, before the entered end. */
function largestGroup(drops: readonly Drop[]): Drop[] {
  const groups = drops.map((centre) =>
    drops.filter((drop) => Math.abs(drop.clockMin - centre.clockMin) <= SAME_CLOCK_MIN),
  )
  const nights = (group: readonly Drop[]) => new Set(group.map((drop) => drop.night)).size
  return groups.reduce<Drop[]>((best, group) => (nights(group) > nights(best) ? group : best), [])
}

/** The entered end of the supply on a date, minutes after midnight; null where it is not on that day. */
function enteredEnd(input: FindingInput, airHandlerId: number, date: string): number | null {
  const today = (supplyHoursAround(input.plan, airHandlerId, date) ?? []).filter((row) =>
    row.days.includes(isoWeekday(date)),
  )
  return today.length === 0 ? null : Math.max(...today.map((row) => minutesOf(row.to)))
}

/** Air handlers whose rooms slow down together, night after night at one hour before their entered end. */
export function supplyStoppedEarly(input: FindingInput): NewFinding[] {
  const { plan } = input
  const { timeZone } = plan.building
  const recent = input.estimates.filter((one) => one.night >= sinceNight(input) && one.quality !== 'refused')
  return plan.airHandlers.flatMap((handler) => {
    const rooms = plan.rooms.filter((room) => room.airHandlerId === handler.id).map((room) => room.id)
    const early = dropsOf(
      recent.filter((one) => rooms.includes(one.roomId)),
      timeZone,
    ).filter(({ night, clockMin }) => {
      const end = enteredEnd(input, handler.id, night)
      return end !== null && clockMin <= end - LEAST_EARLY_MIN
    })
    const group = largestGroup(early)
    if (new Set(group.map((drop) => drop.roomId)).size < LEAST_ROOMS) return []
    const stopsAt = median(group.map((drop) => drop.clockMin))
    const end = enteredEnd(input, handler.id, group.at(-1)?.night ?? input.lastNight) as number
    const nights = new Set(group.map((drop) => drop.night))
    const stops = roundClock(stopsAt)
    const finding = findingOf(input, {
      kind: 'supply stopped early',
      subjectKey: `air handler ${handler.id}`,
      airHandlerId: handler.id,
      nights,
      leastNights: LEAST_NIGHTS,
      within: WITHIN_NIGHTS,
      detail: {
        stopsAt: stops,
        enteredEnd: roundClock(end),
        minutesEarly: Math.round(end - stopsAt),
        rooms: [...new Set(group.map((drop) => drop.roomId))].sort((a, b) => a - b),
      },
      sentence: `${handler.name} stops at about ${stops}, though its hours say ${roundClock(end)}: its rooms slowed down together on ${nights.size} nights.`,
    })
    return finding ?? []
  })
}

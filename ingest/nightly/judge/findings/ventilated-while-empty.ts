import type { NewFinding } from '@/db/changes/findings'
import { median } from '@/lib/math/robust'
import { isoWeekday, localToEpochS } from '@/lib/time'
import { supplyHoursAround } from '../../analysis/rooms'
import type { JudgedEstimate } from '../estimates'
import { type FindingInput, findingOf, sinceNight } from './types'

const MINUTE_MS = 60_000
/** A decay speaks for the time after the entered end when it goes on this long beyond it, and for this share of its length. */
const BEYOND_MS = 20 * MINUTE_MS
const LEAST_BEYOND_SHARE = 1 / 3
/** Share of the occupied rate from which the supply is taken to run on. */
const LEAST_SHARE = 0.6
/** Below this a room leaks rather than is supplied, 1/h. */
const LEAST_RATE_PER_HOUR = 0.8
const LEAST_NIGHTS = 4
const WITHIN_NIGHTS = 14

/** The entered end of the supply on the night of an estimate, epoch milliseconds; null where it is not on that day. */
function endOfSupply(input: FindingInput, airHandlerId: number, night: string): number | null {
  const today = (supplyHoursAround(input.plan, airHandlerId, night) ?? []).filter((row) =>
    row.days.includes(isoWeekday(night)),
  )
  const last = today
    .map((row) => row.to)
    .sort()
    .at(-1)
  if (last === undefined) return null
  return localToEpochS(night, last === '24:00' ? '23:59:59' : last, input.plan.building.timeZone) * 1000
}

/** Whether the decay goes on well beyond the entered end without slowing down. */
function runsOn(estimate: JudgedEstimate, endMs: number, occupiedRate: number): boolean {
  const low = estimate.airChangeRateLowPerHour
  if (low === null || low < Math.max(LEAST_RATE_PER_HOUR, LEAST_SHARE * occupiedRate)) return false
  const beyondMs = estimate.endAt.getTime() - Math.max(endMs, estimate.startAt.getTime())
  const wholeMs = estimate.endAt.getTime() - estimate.startAt.getTime()
  return beyondMs >= BEYOND_MS && beyondMs >= LEAST_BEYOND_SHARE * wholeMs
}

/** Rooms whose supply does not stop when its hours end: decays go on beyond the end at the rate of the day. */
export function ventilatedWhileEmpty(input: FindingInput): NewFinding[] {
  const since = sinceNight(input)
  return input.plan.rooms.flatMap((room) => {
    if (room.kind !== 'room' || room.airHandlerId === null) return []
    const handlerId = room.airHandlerId
    const own = input.estimates.filter(
      (one) => one.roomId === room.id && one.night >= since && one.quality !== 'refused',
    )
    const occupied = own.flatMap((one) => (one.mode === 'supply on' ? (one.airChangeRatePerHour ?? []) : []))
    if (occupied.length < LEAST_NIGHTS) return []
    const occupiedRate = median(occupied)
    const seen = own.filter((one) => {
      const endMs = endOfSupply(input, handlerId, one.night)
      return endMs !== null && runsOn(one, endMs, occupiedRate)
    })
    const nights = new Set(seen.map((one) => one.night))
    const rate = seen.length === 0 ? 0 : median(seen.flatMap((one) => one.airChangeRatePerHour ?? []))
    const finding = findingOf(input, {
      kind: 'ventilated while empty',
      subjectKey: `room ${room.id}`,
      roomId: room.id,
      airHandlerId: handlerId,
      nights,
      leastNights: LEAST_NIGHTS,
      within: WITHIN_NIGHTS,
      detail: { ratePerHour: rate, occupiedRatePerHour: occupiedRate },
      sentence: `${room.name} is still ventilated after its supply hours, while nobody is there: seen on ${nights.size} nights.`,
    })
    return finding ?? []
  })
}

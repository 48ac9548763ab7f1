import { weekdayOf } from '../local-time'
import { type Draws, drawsFor } from '../random'
import type { RoomPlan } from '../scenario'
import type { World } from '../world'
import type { DaySheet, Whereabouts } from './day-sheet'
import { personOf } from './person'

export const MEETING_RATE = 1.25
const LENGTHS_MIN = [30, 45, 60, 60, 75, 90]
const FIRST_MIN = 9 * 60
/** Many a day ends with a meeting from a quarter past four. */
const LATE_FROM_MIN = 16 * 60 + 15
const LAST_END_MIN = 17 * 60 + 40

type Booking = { from: number; to: number; people: number }

/** The meetings of one room on one day: staff who are free come from their desks, visitors make up the number. */
export function holdMeetings(
  world: World,
  room: RoomPlan,
  day: number,
  staff: readonly Whereabouts[],
  sheet: DaySheet,
): void {
  if (room.activity.kind !== 'meeting' || weekdayOf(day) > 5) return
  const draws = drawsFor(world.seed, 'meetings', room.number, day)
  const zone = world.zoneIndex.get(room.number)!
  for (const booking of bookingsOf(world, room, room.activity.perDay, draws)) {
    const free = staff.filter((s) => s.isHome(booking.from - 5, booking.to + 5))
    const fromStaff = Math.min(free.length >> 1, Math.round(booking.people * draws.between(0.3, 0.8)))
    for (let i = 0; i < booking.people; i++) {
      const from = booking.from + draws.between(-4, 3)
      const to = booking.to + draws.between(-2, 4)
      if (i < fromStaff) {
        const at = draws.whole(0, free.length - 1)
        free.splice(at, 1)[0]!.go(zone, from, to)
      } else {
        const visitor = personOf(world.seed, `visitor:${draws.whole(0, 399)}`, 22, 66)
        sheet.place(visitor, zone, from, to, MEETING_RATE)
      }
    }
  }
}

function bookingsOf(world: World, room: RoomPlan, perDay: number, draws: Draws): Booking[] {
  if (room.activity.kind !== 'meeting') return []
  const small = world.story.switches.smallRoom && world.story.smallRoom.room === room.number
  const { from: fewest, to: most } = small ? world.story.smallRoom : room.activity
  const bookings: Booking[] = []
  let at = FIRST_MIN + 15 * draws.whole(0, 3)
  while (at < LAST_END_MIN) {
    if (at > 720 && at < 795 && draws.chance(0.75)) at = 795 + 15 * draws.whole(0, 3)
    const length = LENGTHS_MIN[draws.whole(0, LENGTHS_MIN.length - 1)]!
    const held = draws.chance(Math.min(0.95, perDay / 4.2))
    if (held && at + length <= LAST_END_MIN)
      bookings.push({ from: at, to: at + length, people: draws.whole(fewest, most) })
    at += length + 15 * draws.whole(1, 6)
  }
  const isFree = (bookings.at(-1)?.to ?? 0) <= LATE_FROM_MIN - 30
  if (isFree && draws.chance(0.6))
    bookings.push({ from: LATE_FROM_MIN, to: draws.whole(1020, 1035), people: draws.whole(fewest, most) })
  return bookings
}

import { weekdayOf } from '../local-time'
import { drawsFor } from '../random'
import type { RoomPlan } from '../scenario'
import type { World } from '../world'
import type { DaySheet } from './day-sheet'
import { personOf } from './person'

const COOKING_RATE = 2.2
const COUNTER_RATE = 1.4
const READING_RATE = 1.15

/** People who work at a counter or a stove, and those who come and go: canteen, reception, library. */
export function receiveCallers(world: World, room: RoomPlan, day: number, sheet: DaySheet): void {
  if (weekdayOf(day) > 5) return
  const zone = world.zoneIndex.get(room.number)!
  const draws = drawsFor(world.seed, 'callers', room.number, day)
  const activity = room.activity
  if (activity.kind === 'canteen') {
    for (let i = 0; i < activity.cooks; i++) {
      const cook = personOf(world.seed, `cook:${i}`, 24, 58)
      sheet.place(cook, zone, 615 + draws.between(-10, 15), 895 + draws.between(-10, 20), COOKING_RATE)
    }
  }
  if (activity.kind === 'reception') {
    const shifts = [470 + draws.between(-8, 6), 770, 1075 + draws.between(-5, 15)]
    for (let i = 0; i < activity.staff; i++) {
      const clerk = personOf(world.seed, `clerk:${i}`, 21, 62)
      sheet.place(clerk, zone, shifts[i] ?? 770, (shifts[i + 1] ?? 1075) + 10, COUNTER_RATE)
    }
    for (let i = 0; i < activity.visitorsPerDay; i++) {
      const at = draws.between(510, 1040)
      const caller = personOf(world.seed, `visitor:${draws.whole(0, 399)}`, 22, 66)
      sheet.place(caller, zone, at, at + draws.between(3, 14), COUNTER_RATE)
    }
  }
  if (activity.kind === 'library') {
    for (let i = Math.round(activity.visitsPerDay * draws.between(0.7, 1.3)); i > 0; i--) {
      const at = draws.between(540, 1030)
      const reader = personOf(world.seed, `visitor:${draws.whole(0, 399)}`, 22, 66)
      sheet.place(reader, zone, at, Math.min(1095, at + draws.between(15, 110)), READING_RATE)
    }
  }
}

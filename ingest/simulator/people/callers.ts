import { minuteOf, weekdayOf } from '../local-time'
import { drawsFor } from '../random'
import type { RoomActivity, RoomPlan } from '../scenario'
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
  if (activity.kind === 'library') readAll(world, zone, day, activity, sheet)
}

/** The library's readers: everyone leaves when it shuts, at noon and in the evening. */
function readAll(
  world: World,
  zone: number,
  day: number,
  library: RoomActivity & { kind: 'library' },
  sheet: DaySheet,
): void {
  const draws = drawsFor(world.seed, 'readers', zone, day)
  for (const span of library.open) {
    const [opens, shuts] = [minuteOf(span.from), minuteOf(span.to)]
    const read = (from: number, to: number) => {
      const reader = personOf(world.seed, `visitor:${draws.whole(0, 399)}`, 22, 66)
      sheet.place(reader, zone, from, Math.min(to, shuts + draws.between(-3, 2)), READING_RATE)
    }
    const visits = Math.round((library.visitsPerDay / library.open.length) * draws.between(0.7, 1.3))
    for (let i = 0; i < visits; i++) {
      const at = draws.between(opens, shuts - 20)
      read(at, at + draws.between(15, 110))
    }
    const circle = library.circleDays.includes(weekdayOf(day)) ? draws.whole(10, 15) : 0
    for (let i = 0; i < circle; i++) read(shuts - 95 + draws.between(-8, 8), shuts + 10)
  }
}

import { minuteOf, weekdayOf } from '../local-time'
import { drawsFor } from '../random'
import type { World } from '../world'
import type { DaySheet } from './day-sheet'
import { personOf } from './person'

const CLEANING_RATE = 2.8

/** Which cleaner does which floor on which weekday. */
const ROTA: readonly { floor: string; days: readonly number[]; cleaner: number }[] = [
  { floor: 'ground', days: [1, 3, 5], cleaner: 0 },
  { floor: 'first', days: [2, 4], cleaner: 0 },
  { floor: 'second', days: [1, 2, 4], cleaner: 1 },
]

/** The evening round: room after room, longer in large ones, a minute or two on the landing between. */
export function cleanRooms(world: World, day: number, sheet: DaySheet): void {
  if (!world.story.switches.cleaners) return
  const weekday = weekdayOf(day)
  for (const duty of ROTA) {
    if (!duty.days.includes(weekday)) continue
    const draws = drawsFor(world.seed, 'cleaning', duty.floor, day)
    const cleaner = personOf(world.seed, `cleaner:${duty.cleaner}`, 25, 60)
    const landing = world.corridorOfFloor.get(duty.floor)!
    const rooms = world.scenario.rooms
      .filter((room) => room.floor === duty.floor)
      .map((room) => ({ room, order: draws.uniform() }))
      .sort((a, b) => a.order - b.order)
    let at = minuteOf(world.story.cleaners.from) + draws.between(-5, 15)
    for (const { room } of rooms) {
      const stay = Math.min(28, 5 + room.floorAreaM2 / 9) * draws.between(0.8, 1.25)
      sheet.place(cleaner, world.zoneIndex.get(room.number)!, at, at + stay, CLEANING_RATE, true)
      const pause = draws.between(1, 3)
      sheet.place(cleaner, landing, at + stay, at + stay + pause, CLEANING_RATE, true)
      at += stay + pause
    }
  }
}

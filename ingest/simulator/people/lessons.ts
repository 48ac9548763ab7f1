import { minuteOf, weekdayOf } from '../local-time'
import { drawsFor } from '../random'
import type { Lesson, RoomPlan } from '../scenario'
import type { World } from '../world'
import type { DaySheet } from './day-sheet'
import { personOf } from './person'

export const LESSON_RATE = 1.2
const TEACHING_RATE = 1.6
const EATING_RATE = 1.4
const LEARNERS = 170

/** The timetable of one teaching room on one day: learners drift in one by one and leave together; some go on to the canteen. */
export function holdLessons(
  world: World,
  room: RoomPlan,
  day: number,
  canteen: number,
  sheet: DaySheet,
): void {
  if (room.activity.kind !== 'lessons') return
  const weekday = weekdayOf(day)
  const slots = room.activity.slots.filter((slot) => slot.days.includes(weekday))
  slots.forEach((slot, order) => {
    const draws = drawsFor(world.seed, 'lesson', room.number, day, order)
    if (draws.chance(slot.chance)) holdLesson(world, room, day, slot, canteen, sheet)
  })
}

function holdLesson(
  world: World,
  room: RoomPlan,
  day: number,
  slot: Lesson,
  canteen: number,
  sheet: DaySheet,
): void {
  if (room.activity.kind !== 'lessons') return
  const draws = drawsFor(world.seed, 'learners', room.number, day, slot.from)
  const zone = world.zoneIndex.get(room.number)!
  const [begins, ends] = [minuteOf(slot.from), minuteOf(slot.to)]
  const learners = draws.whole(room.activity.from, room.activity.to)
  const firstLearner = draws.whole(0, LEARNERS - 1)
  for (let i = 0; i < learners; i++) {
    const learner = personOf(world.seed, `learner:${(firstLearner + i) % LEARNERS}`, 16, 28)
    const leaves = ends + draws.between(-1, 5)
    sheet.place(learner, zone, begins + draws.between(-9, 4), leaves, LESSON_RATE)
    const eats = ends >= 735 && ends <= 780 && draws.chance(0.45)
    if (eats) sheet.place(learner, canteen, leaves + 4, leaves + draws.between(24, 38), EATING_RATE)
  }
  if (room.activity.staffed) {
    const tutor = personOf(world.seed, `tutor:${room.number}`, 28, 60)
    sheet.place(tutor, zone, begins - draws.between(6, 14), ends + draws.between(2, 9), TEACHING_RATE)
  }
}

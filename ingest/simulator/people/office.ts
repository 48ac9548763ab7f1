import { minuteOf, weekdayOf } from '../local-time'
import { type Draws, drawsFor } from '../random'
import type { RoomActivity, RoomPlan } from '../scenario'
import type { World } from '../world'
import { ELSEWHERE, Whereabouts } from './day-sheet'
import { personOf } from './person'

/** Share of staff who come in, Monday to Friday. */
const ATTENDANCE = [0.84, 0.92, 0.92, 0.88, 0.68]

/** The day of every member of staff of one office or workshop: coming, breaks, lunch, going. Empty on days off. */
export function officeDay(world: World, room: RoomPlan, day: number, canteen: number): Whereabouts[] {
  if (room.activity.kind !== 'office') return []
  const attendance = ATTENDANCE[weekdayOf(day) - 1]
  if (attendance === undefined) return []
  const here: Whereabouts[] = []
  for (let i = 0; i < room.activity.staff; i++) {
    const draws = drawsFor(world.seed, 'office', room.number, i, day)
    if (!draws.chance(attendance)) continue
    const person = personOf(world.seed, `staff:${room.number}:${i}`, 23, 64)
    const stay = new Whereabouts(person, world.zoneIndex.get(room.number)!, room.activity.metabolicRate)
    const { arrive, leave, lunch, back } = hoursOf(room.activity, draws)
    stay.go(stay.home, arrive, leave)
    for (let breaks = draws.whole(3, 6); breaks > 0; breaks--) {
      const at = draws.between(arrive + 20, leave - 20)
      const where = draws.chance(0.55) ? world.corridorOfFloor.get(room.floor)! : ELSEWHERE
      stay.go(where, at, at + draws.between(3, 9))
    }
    stay.go(ELSEWHERE, lunch, back)
    if (draws.chance(0.42)) stay.go(canteen, lunch + 3, Math.min(back - 2, lunch + draws.between(20, 34)))
    here.push(stay)
  }
  return here
}

type OfficeHours = { arrive: number; leave: number; lunch: number; back: number }

/** When one person comes, eats and goes, local minutes: each in their own time, or a crew within a few minutes of each other. */
function hoursOf(activity: RoomActivity & { kind: 'office' }, draws: Draws): OfficeHours {
  const [come, go] = [minuteOf(activity.arrive), minuteOf(activity.leave)]
  if (activity.together) {
    const near = () => draws.between(-4, 3)
    return { arrive: come + near(), leave: go + near(), lunch: 750 + near(), back: 800 + near() }
  }
  const lunch = draws.between(720, 800)
  return {
    arrive: come + clip(22 * draws.normal(), 55),
    leave: go + clip(26 * draws.normal(), 65),
    lunch,
    back: lunch + draws.between(30, 55),
  }
}

function clip(value: number, limit: number): number {
  return Math.max(-limit, Math.min(limit, value))
}

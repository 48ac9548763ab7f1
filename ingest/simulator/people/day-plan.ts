import { INDOOR_K, type World } from '../world'
import { receiveCallers } from './callers'
import { cleanRooms } from './cleaners'
import { DaySheet } from './day-sheet'
import { holdLessons } from './lessons'
import { holdMeetings, MEETING_RATE } from './meetings'
import { officeDay } from './office'

const CANTEEN_RATE = 1.4
const WALKING_RATE = 2.2

/** Everyone's whereabouts on one local day, person by person: a function of the seed and the date alone. */
export function planDay(world: World, day: number): DaySheet {
  const sheet = new DaySheet(world.zones.length, INDOOR_K, world.pressureKPa)
  if (world.isClosed(day)) return sheet
  const rooms = world.scenario.rooms
  const canteenRoom = rooms.find((room) => room.activity.kind === 'canteen')
  const canteen = canteenRoom ? world.zoneIndex.get(canteenRoom.number)! : -1

  const staffOfTenancy = new Map<string | null, ReturnType<typeof officeDay>>()
  for (const room of rooms) {
    const staff = officeDay(world, room, day, canteen)
    staffOfTenancy.set(room.tenancy, [...(staffOfTenancy.get(room.tenancy) ?? []), ...staff])
  }
  const everyone = [...staffOfTenancy.values()].flat()
  for (const room of rooms) {
    const staff = room.tenancy === null ? everyone : (staffOfTenancy.get(room.tenancy) ?? [])
    holdMeetings(world, room, day, staff, sheet)
    holdLessons(world, room, day, canteen, sheet)
    receiveCallers(world, room, day, sheet)
  }
  const rateAt = (zone: number) =>
    zone === canteen ? CANTEEN_RATE : zone >= rooms.length ? WALKING_RATE : MEETING_RATE
  for (const stay of everyone) stay.writeTo(sheet, rateAt)
  cleanRooms(world, day, sheet)
  return sheet
}

/** The sheet of whichever local day is asked for; the last one is kept. */
export function dayPlans(world: World): (day: number) => DaySheet {
  let kept: { day: number; sheet: DaySheet } | undefined
  return (day) => {
    if (kept?.day !== day) kept = { day, sheet: planDay(world, day) }
    return kept.sheet
  }
}

import { OCCUPANCY_CAUTION } from '@/lib/air/supports'
import { countWord, listed, sentenceCase } from '@/lib/format/counts'
import { addDays } from '@/lib/time'
import type { DigestContent, DigestRoom } from '@/lib/wire/digests'
import { beingDone } from './findings'
import type { WeekMaterial } from './material'
import { digestRoom, heldAllDay } from './room'
import { people, weekInWords } from './words'

/** Rooms of use by appointment: in these it helps to know how long to leave them empty. */
const BOOKED = ['meeting room', 'classroom', 'tutorial room', 'teaching hall']

const enough = (room: DigestRoom) => room.standing === 'enough' || room.standing === 'enough, just'

function titleOf(rooms: readonly DigestRoom[]): string {
  const total = rooms.length
  const short = rooms.filter((room) => room.standing === 'too little').length
  const good = rooms.filter(enough).length
  const of = `of your ${countWord(total)} rooms`
  if (total === 1 && good === 1) return 'Your room had enough outdoor air'
  if (total === 1 && short === 1) return 'Your room had too little outdoor air'
  if (good === total) return `All ${countWord(total)} of your rooms had enough outdoor air`
  if (short > 0) return `${sentenceCase(countWord(short))} ${of} had too little outdoor air`
  if (good === 0) return 'Whether your rooms had enough outdoor air is not proven yet'
  return `${sentenceCase(countWord(good))} ${of} had enough outdoor air, the rest is not proven yet`
}

function leadOf(rooms: readonly DigestRoom[]): string[] {
  const short = rooms
    .filter((room) => room.standing === 'too little')
    .map((room) => {
      const planned = room.plannedFor === null ? '' : ` It is planned for ${people(room.plannedFor)}.`
      const less = `${room.name} gets less outdoor air than was agreed`
      if (room.supportsPersons === null) return `${less}.${planned}`
      if (room.supportsPersons === 0)
        return `${less}: too little for anyone to stay by that measure.${planned}`
      return `${less}: enough for ${people(room.supportsPersons)}.${planned}`
    })
  const stale = rooms.filter((room) => room.overMinutes > 0)
  const worst = [...stale].sort((a, b) => b.overMinutes - a.overMinutes).slice(0, 3)
  const unproven = rooms.filter((room) => room.standing === 'not proven yet')
  return [
    ...short,
    ...(worst.length === 0
      ? ['No room was over its limit in the hours in which people use it, as far as its sensor was heard.']
      : [
          `In the hours in which people use them: ${listed(worst.map((room) => `${room.name} ${room.overWords}`))}.`,
        ]),
    ...(unproven.length === 0
      ? []
      : [`Not proven yet: ${listed(unproven.map((room) => room.name))}. The list says why for each.`]),
  ]
}

function goodToKnow(rooms: readonly DigestRoom[]): string | null {
  const known = rooms.filter((room) => BOOKED.includes(room.use) && room.clearsInMinutes !== null)
  const slowest = known.sort((a, b) => (b.clearsInMinutes ?? 0) - (a.clearsInMinutes ?? 0)).slice(0, 2)
  const [first, second] = slowest
  if (!first) return null
  const more = second ? ` ${second.name} needs ${second.clearsInMinutes} minutes.` : ''
  return `After a full meeting, leave ${first.name} empty for ${first.clearsInMinutes} minutes with the ventilation running, and it is fresh again.${more}`
}

const rank = (room: DigestRoom) =>
  ['too little', 'enough, just', 'not proven yet', 'enough'].indexOf(room.standing)

/**
 * One tenancy's digest of a week: which rooms had the outdoor air that was agreed (only where it is proven), how many people each
 * room's ventilation supports, how the weekdays went, and what was found. Undefined where the tenancy held no room for a whole day.
 */
export function buildDigest(
  material: WeekMaterial,
  tenancy: { id: number; name: string },
): DigestContent | undefined {
  const { plan, weekStart } = material
  const weekEnd = addDays(weekStart, 6)
  const held = plan.rooms.filter(
    (room) =>
      room.kind === 'room' &&
      [0, 1, 2, 3, 4, 5, 6].some((days) => heldAllDay(plan, room.id, tenancy.id, addDays(weekStart, days))),
  )
  if (held.length === 0) return undefined
  const rooms = held
    .map((room) => digestRoom(material, tenancy.id, room))
    .sort((a, b) => rank(a) - rank(b) || a.number.localeCompare(b.number))
  return {
    version: 1,
    building: { name: plan.building.name, timeZone: plan.building.timeZone },
    tenancy: { name: tenancy.name },
    ...{ weekStart, weekEnd, weekWords: weekInWords(weekStart, weekEnd) },
    title: titleOf(rooms),
    lead: leadOf(rooms),
    rooms,
    beingDone: beingDone(material, held, rooms, weekEnd),
    goodToKnow: goodToKnow(rooms),
    occupancyCaution: OCCUPANCY_CAUTION,
    cautions: [
      'Each number of people is worked out from one CO2 sensor in the room, from the safe end of what was measured, rounded down.',
      'Little CO2 does not prove clean air.',
    ],
  }
}

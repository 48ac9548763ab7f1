import type { NewFinding } from '@/db/changes/findings'
import { type FindingInput, findingOf, sinceNight } from './types'

const LEAST_NIGHTS = 4
const WITHIN_NIGHTS = 14

/** Rooms whose decays show, night after night, that part of their air comes from the room beside them. */
export function airFromNeighbour(input: FindingInput): NewFinding[] {
  const since = sinceNight(input)
  return input.plan.rooms.flatMap((room) => {
    const seen = input.estimates.filter(
      (one) => one.roomId === room.id && one.night >= since && one.reasons.includes('neighbour-coupled'),
    )
    const neighbour = input.plan.rooms.find((one) => one.id === room.neighbourRoomId)
    const nights = new Set(seen.map((one) => one.night))
    const finding = findingOf(input, {
      kind: 'air from neighbour',
      subjectKey: `room ${room.id}`,
      roomId: room.id,
      nights,
      leastNights: LEAST_NIGHTS,
      within: WITHIN_NIGHTS,
      detail: { neighbourRoomId: neighbour?.id ?? null },
      sentence: `Part of the air of ${room.name} comes from ${neighbour?.name ?? 'a room beside it'}, not from outdoors: seen on ${nights.size} nights.`,
    })
    return finding ?? []
  })
}

import type { PlanRoom } from '@/db/queries/building-plan'
import type { DigestContent, DigestRoom } from '@/lib/wire/digests'
import type { WeekMaterial } from './material'
import { dateInWords, people } from './words'

type Finding = WeekMaterial['findings'][number]
type Told = DigestContent['beingDone'][number]

const ON_THE_LIST = 'The building’s operator and energy engineer have it on their list.'

const text = (detail: unknown, name: string): string =>
  String((detail as Record<string, unknown>)[name] ?? '')

/** A finding for someone who rents the room: what it means there, and who has it. Null where it is no matter of the tenant's. */
function tell(finding: Finding, subject: string): string | null {
  const { detail } = finding
  switch (finding.kind) {
    case 'supply stopped early':
      return `The ventilation stops at about ${text(detail, 'stopsAt')}, though it should run until ${text(detail, 'enteredEnd')}. ${ON_THE_LIST}`
    case 'too small for its use':
      return `At its fullest at least ${people(Number(text(detail, 'personsAtLeast')))} used ${subject}, which is planned for ${text(detail, 'designHeadcount')}. Its ventilation cannot follow; a larger room would. ${ON_THE_LIST}`
    case 'air from neighbour':
      return `Part of its air comes from the room beside it. A closed door helps. ${ON_THE_LIST}`
    case 'sensor drifting':
      return 'Its sensor is drifting and is to be checked in fresh air. Until then its levels count with care.'
    case 'sensor silent':
      return `Its sensor has said nothing since ${dateInWords(finding.firstNight)} and is to be looked at.`
    default:
      return null
  }
}

/** Air handlers by their rooms: what stops early on the plant is told for the tenant's rooms that it serves. */
function subjectOf(finding: Finding, rooms: readonly PlanRoom[]): string | null {
  if (finding.roomId !== null) return rooms.find((room) => room.id === finding.roomId)?.name ?? null
  const served = rooms.filter((room) => room.airHandlerId === finding.airHandlerId)
  return served.length === 0 || finding.airHandlerId === null
    ? null
    : served.map((room) => room.name).join(', ')
}

/** What was found about a tenancy's rooms by the end of the week, and the rooms that fell short though nothing explains it. */
export function beingDone(
  material: WeekMaterial,
  planRooms: readonly PlanRoom[],
  rooms: readonly DigestRoom[],
  weekEnd: string,
): Told[] {
  const told = material.findings
    .filter((finding) => finding.firstNight <= weekEnd && finding.lastNight >= material.weekStart)
    .flatMap((finding) => {
      const subject = subjectOf(finding, planRooms)
      const sentence = subject === null ? null : tell(finding, subject)
      return subject === null || sentence === null ? [] : [{ subject, sentence }]
    })
  const explained = new Set(told.map(({ subject }) => subject))
  const unexplained = rooms
    .filter((room) => room.standing === 'too little' && !explained.has(room.name))
    .map((room) => ({
      subject: room.name,
      sentence: `It gets less outdoor air than was agreed. It is measured again each time it empties. ${ON_THE_LIST}`,
    }))
  return [...unexplained, ...told]
}

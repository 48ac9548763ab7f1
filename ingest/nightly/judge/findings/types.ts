import type { NewFinding } from '@/db/changes/findings'
import type { NewRoomWeek } from '@/db/changes/weeks'
import type { BuildingPlan } from '@/db/queries/building-plan'
import type { NightRun } from '@/db/queries/nights'
import { addDays } from '@/lib/time'
import type { JudgedEstimate } from '../estimates'

/** What findings are made from: nothing but what runs and weeks have stored. */
export type FindingInput = {
  plan: BuildingPlan
  /** last analysed night */
  lastNight: string
  /** finished runs of the last nights, in order of date */
  runs: readonly NightRun[]
  /** estimates of every room of the last nights */
  estimates: readonly JudgedEstimate[]
  /** the rows that carry the newest verdicts */
  verdicts: readonly NewRoomWeek[]
  methodVersion: string
}

/** Nights that a finding looks back over. */
export const FINDING_NIGHTS = 28

/** First night of the nights that a finding looks at. */
export const sinceNight = (input: FindingInput, nights = FINDING_NIGHTS) =>
  addDays(input.lastNight, 1 - nights)

/** A finding of one subject from the nights it was seen on; undefined below `leastNights`. */
export function findingOf(
  input: FindingInput,
  subject: {
    kind: NewFinding['kind']
    subjectKey: string
    roomId?: number
    airHandlerId?: number
    nights: Iterable<string>
    leastNights: number
    /** the last time may lie no further back than this */
    within?: number
    detail: Record<string, unknown>
    sentence: string
  },
): NewFinding | undefined {
  const nights = [...new Set(subject.nights)].sort()
  const first = nights[0]
  const last = nights.at(-1)
  if (first === undefined || last === undefined || nights.length < subject.leastNights) return undefined
  if (subject.within !== undefined && last < sinceNight(input, subject.within)) return undefined
  const { building } = input.plan
  return {
    organizationId: building.organizationId,
    buildingId: building.id,
    roomId: subject.roomId ?? null,
    airHandlerId: subject.airHandlerId ?? null,
    kind: subject.kind,
    subjectKey: subject.subjectKey,
    firstNight: first,
    lastNight: last,
    nights: nights.length,
    detail: subject.detail,
    sentence: subject.sentence,
    methodVersion: input.methodVersion,
  }
}

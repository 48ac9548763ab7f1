import type { NewFinding } from '@/db/changes/findings'
import { EN_DEFAULT_GENERATION_LPS } from '@/lib/air/generation'
import { type FindingInput, findingOf, sinceNight } from './types'

/** Minutes over the limit that make a day count. */
const LEAST_OVER_MIN = 20
const LEAST_DAYS = 4
const LOOK_BACK_DAYS = 14
/** Share of the planned people that must be exceeded. */
const LEAST_CROWDING = 1.2

/**
 * Rooms that stand over their limit again and again though their ventilation is not short of its basis: more people than it is planned for.
 * The people are reckoned from the day's fullest quarter of an hour as if it lasted (n = Q (C − Co) / g), which is a least number because
 * the level was still rising, with the flow's lower end.
 * @source single-zone steady state, ASTM D6245; generation EN 16798-1 default
 */
export function tooSmallForItsUse(input: FindingInput): NewFinding[] {
  const since = sinceNight(input, LOOK_BACK_DAYS)
  return input.verdicts.flatMap((verdict) => {
    const room = input.plan.rooms.find((one) => one.id === verdict.roomId)
    const { flowLowLps, designHeadcount } = verdict
    if (!room || verdict.verdict === 'short of basis' || !flowLowLps || !designHeadcount) return []
    const days = input.runs
      .filter((run) => run.localDate >= since)
      .flatMap((run) => {
        const facts = run.carried.days?.[room.id]
        if (!facts || facts.peakPpm === null || facts.overMin < LEAST_OVER_MIN) return []
        const persons = (flowLowLps * (facts.peakPpm - facts.outdoorPpm)) / (1e6 * EN_DEFAULT_GENERATION_LPS)
        return persons >= LEAST_CROWDING * designHeadcount ? [{ night: run.localDate, persons }] : []
      })
    const most = Math.floor(Math.max(0, ...days.map((day) => day.persons)))
    const finding = findingOf(input, {
      kind: 'too small for its use',
      subjectKey: `room ${room.id}`,
      roomId: room.id,
      nights: days.map((day) => day.night),
      leastNights: LEAST_DAYS,
      detail: { personsAtLeast: most, designHeadcount, lookBackDays: LOOK_BACK_DAYS },
      sentence: `${room.name} is used by more people than its ventilation supports: at least ${most} at the fullest, planned for ${designHeadcount}. It stood over its limit on ${days.length} of the last ${LOOK_BACK_DAYS} days.`,
    })
    return finding ?? []
  })
}

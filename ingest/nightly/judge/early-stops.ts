import type { NewFinding } from '@/db/changes/findings'
import type { BuildingPlan } from '@/db/queries/building-plan'
import type { JudgedEstimate } from './estimates'
import { clockMinutes, minutesOf } from './findings/clock'

/** Share of an estimate's window that may lie after the stop; more, and it no longer speaks for the supply. */
const MOST_AFTER = 0.2
const DAY_MIN = 24 * 60

/** Minutes of a window that lie after a wall clock of its night. */
function minutesAfter(estimate: JudgedEstimate, stopMin: number, timeZone: string): number {
  const startMin = clockMinutes(estimate.startAt, timeZone)
  const lengthMin = (estimate.endAt.getTime() - estimate.startAt.getTime()) / 60_000
  // what starts in the small hours belongs to the evening before only by its window, not by its date
  return Math.min(lengthMin, Math.max(0, Math.min(startMin + lengthMin, DAY_MIN) - stopMin))
}

/**
 * Estimates with the schedule's word withdrawn where an air handler is known to stop before its hours end: a window that lies after the usual
 * stop and is "supply on" by the schedule alone becomes "unknown", because schedule and measurement disagree. So no room is called short
 * for an hour in which its supply does not run.
 */
export function withoutEarlyStops(
  plan: BuildingPlan,
  estimates: readonly JudgedEstimate[],
  found: readonly NewFinding[],
): JudgedEstimate[] {
  const stops = found
    .filter((finding) => finding.kind === 'supply stopped early')
    .map((finding) => ({
      rooms: new Set(
        plan.rooms.filter((room) => room.airHandlerId === finding.airHandlerId).map((room) => room.id),
      ),
      fromNight: finding.firstNight,
      stopMin: minutesOf(finding.detail.stopsAt as string),
    }))
  return estimates.map((estimate) => {
    if (estimate.mode !== 'supply on' || estimate.modeFrom !== 'schedule') return estimate
    const lengthMin = (estimate.endAt.getTime() - estimate.startAt.getTime()) / 60_000
    const doubted = stops.some(
      (stop) =>
        stop.rooms.has(estimate.roomId) &&
        estimate.night >= stop.fromNight &&
        minutesAfter(estimate, stop.stopMin, plan.building.timeZone) > MOST_AFTER * lengthMin,
    )
    return doubted ? { ...estimate, mode: 'unknown' as const, modeFrom: null } : estimate
  })
}

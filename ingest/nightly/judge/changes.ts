import type { NewRateChange } from '@/db/changes/weeks'
import type { PlanRoom } from '@/db/queries/building-plan'
import { findRateDrift, findRateSteps, lastChangeNight, measuredDays, type RateDay } from '@/lib/air/change'
import { MODES, type Mode } from '@/lib/air/types'
import { dayRates } from '@/lib/air/weeks'
import type { JudgedEstimate } from './estimates'

/** Nights that changes are looked for in. */
export const CHANGE_NIGHTS = 180

function daysOf(estimates: readonly JudgedEstimate[], mode: Mode, throughNight: string): RateDay[] {
  return measuredDays(dayRates(estimates.filter((one) => one.mode === mode && one.night <= throughNight)))
}

/** First night of the room's present rate in a mode, as far as it could be known on `throughNight`; null without a step. */
export function presentSince(
  estimates: readonly JudgedEstimate[],
  mode: Mode,
  throughNight: string,
): string | null {
  return lastChangeNight(findRateSteps(daysOf(estimates, mode, throughNight)))
}

/** Steps of a room's rate within each mode, and the drift since the last step. */
export function roomChanges(
  room: PlanRoom,
  estimates: readonly JudgedEstimate[],
  throughNight: string,
  methodVersion: string,
): NewRateChange[] {
  const here = {
    organizationId: room.organizationId,
    buildingId: room.buildingId,
    roomId: room.id,
    methodVersion,
  }
  return MODES.filter((mode) => mode !== 'unknown').flatMap((mode) => {
    const days = daysOf(estimates, mode, throughNight)
    const steps = findRateSteps(days)
    const since = lastChangeNight(steps)
    const drift = findRateDrift(since === null ? days : days.filter((day) => day.night >= since))
    return [
      ...steps.map((step) => ({
        ...here,
        mode,
        kind: 'step' as const,
        onNight: step.onNight,
        ratio: step.ratio,
        ratioLow: step.ratioLow,
        ratioHigh: step.ratioHigh,
        beforePerHour: step.beforePerHour,
        afterPerHour: step.afterPerHour,
        sentence: step.sentence,
      })),
      ...(drift
        ? [
            {
              ...here,
              mode,
              kind: 'drift' as const,
              onNight: drift.fromNight,
              ratio: drift.ratio,
              ratioLow: drift.ratioLow,
              ratioHigh: drift.ratioHigh,
              beforePerHour: null,
              afterPerHour: null,
              sentence: drift.sentence,
            },
          ]
        : []),
    ]
  })
}

import type { NewFinding } from '@/db/changes/findings'
import type { SuspectSensor } from '@/db/changes/suspects'
import type { BuildingPlan } from '@/db/queries/building-plan'
import type { NightRun } from '@/db/queries/nights'
import { localToEpochS } from '@/lib/time'

/** Notes of the analysis that speak against a sensor, and the words for it. */
const NOTES: Readonly<Record<string, string>> = {
  'floor-implausible': 'reads fresh night air at a level that air outdoors does not have',
  'sensor-stuck': 'repeated one value for hours',
}
const LEAST_NIGHTS = 2
const LAST_NIGHTS = 3

/**
 * Sensors that the nights speak against: drifting ones, and those that on two of the last three nights stood still or read an impossible floor.
 * Since when: the first night of the stretch.
 */
export function suspectSensors(
  plan: BuildingPlan,
  runs: readonly NightRun[],
  findings: readonly NewFinding[],
): SuspectSensor[] {
  const at = (night: string) => new Date(localToEpochS(night, '00:00', plan.building.timeZone) * 1000)
  const drifting = findings
    .filter((finding) => finding.kind === 'sensor drifting')
    .map((finding) => ({
      sensorId: finding.detail.sensorId as number,
      since: at(finding.lastNight),
      reason: `drifts against its fellows: ${Math.round(finding.detail.driftPpm as number)} ppm in ${finding.nights} nights`,
    }))
  const known = new Set(drifting.map((one) => one.sensorId))
  const recent = runs.slice(-LAST_NIGHTS)
  const noted = plan.sensors.flatMap((sensor) => {
    if (known.has(sensor.id)) return []
    const nights = recent.flatMap((run) => {
      const note = run.carried.notes?.find((one) => one.sensorId === sensor.id && one.code in NOTES)
      return note ? [{ night: run.localDate, code: note.code }] : []
    })
    const first = nights[0]
    return first && nights.length >= LEAST_NIGHTS
      ? [{ sensorId: sensor.id, since: at(first.night), reason: NOTES[first.code] as string }]
      : []
  })
  return [...drifting, ...noted]
}

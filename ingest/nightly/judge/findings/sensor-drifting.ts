import type { NewFinding } from '@/db/changes/findings'
import type { NightRun } from '@/db/queries/nights'
import { nightsBetween } from '@/lib/air/nights'
import { median } from '@/lib/math/robust'
import { mannKendall, theilSen } from '@/lib/math/theil-sen'
import { type FindingInput, findingOf, sinceNight } from './types'

const LOOK_BACK_NIGHTS = 42
const LEAST_NIGHTS = 14
const WITHIN_NIGHTS = 7
/** A drift is told from this change over the stretch on, ppm: about a wall sensor's own accuracy. */
const LEAST_DRIFT_PPM = 25
/** Every sensor is asked every night, so the trend must be beyond chance. */
const LARGEST_P = 0.001
/** Quiet floors of neighbouring nights resemble each other: correlation 0.5 is assumed, (1 + φ)/(1 − φ) = 3. */
const VARIANCE_INFLATION = 3
const LEAST_FELLOWS = 4

/** How far a sensor's quiet floor stands from the median of its fellows', night by night, ppm. */
export function floorsAgainstFellows(
  runs: readonly NightRun[],
  sensorId: number,
): { night: string; ppm: number }[] {
  return runs.flatMap((run) => {
    const floors = run.carried.quietFloors ?? {}
    const own = floors[sensorId]
    const fellows = Object.entries(floors).filter(([id]) => id !== String(sensorId))
    if (!own || fellows.length < LEAST_FELLOWS) return []
    return [{ night: run.localDate, ppm: own.ppm - median(fellows.map(([, floor]) => floor.ppm)) }]
  })
}

/** Drift of one sensor against its fellows over a stretch of nights, ppm; null where there is none beyond chance. */
export function driftAgainstFellows(
  nights: readonly { night: string; ppm: number }[],
): { driftPpm: number; ppmPerDay: number; p: number } | null {
  const first = nights[0]
  const last = nights.at(-1)
  if (!first || !last || nights.length < LEAST_NIGHTS) return null
  const x = nights.map(({ night }) => nightsBetween(first.night, night))
  const y = nights.map(({ ppm }) => ppm)
  const { slope } = theilSen(x, y, VARIANCE_INFLATION)
  const { p } = mannKendall(y, VARIANCE_INFLATION)
  const driftPpm = slope * nightsBetween(first.night, last.night)
  return p <= LARGEST_P && Math.abs(driftPpm) >= LEAST_DRIFT_PPM ? { driftPpm, ppmPerDay: slope, p } : null
}

/**
 * Sensors whose reading of the same empty night air moves away from their fellows'. Weather and outdoor air move all of them alike and drop out.
 * @source Theil–Sen and Mann–Kendall (from memory); the thresholds are engineering choices
 */
export function sensorDrifting(input: FindingInput): NewFinding[] {
  const runs = input.runs.filter((run) => run.localDate >= sinceNight(input, LOOK_BACK_NIGHTS))
  const placed = input.plan.placements.filter((placement) => placement.toAt === null)
  return placed.flatMap((placement) => {
    const sensor = input.plan.sensors.find((one) => one.id === placement.sensorId)
    const nights = floorsAgainstFellows(runs, placement.sensorId)
    const drift = driftAgainstFellows(nights)
    if (!sensor || !drift) return []
    const ppm = Math.round(Math.abs(drift.driftPpm))
    const words = drift.driftPpm < 0 ? 'lower' : 'higher'
    const finding = findingOf(input, {
      kind: 'sensor drifting',
      subjectKey: `sensor ${sensor.id}`,
      ...(placement.roomId === null ? {} : { roomId: placement.roomId }),
      nights: nights.map(({ night }) => night),
      leastNights: LEAST_NIGHTS,
      within: WITHIN_NIGHTS,
      detail: { sensorId: sensor.id, driftPpm: drift.driftPpm, ppmPerDay: drift.ppmPerDay, p: drift.p },
      sentence: `The sensor ${sensor.label} reads ${ppm} ppm ${words} than it did ${nights.length} nights ago, measured against its fellows in empty rooms. Check it in fresh air.`,
    })
    return finding ?? []
  })
}

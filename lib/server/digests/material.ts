import type { Tx } from '@/db/client'
import { type BuildingPlan, requireBuildingPlan } from '@/db/queries/building-plan'
import { finishedRuns, type NightRun } from '@/db/queries/nights'
import { findingRows, weekRows } from '@/db/queries/weeks'
import { METHOD_VERSION } from '@/lib/air/decay/version'
import { addDays } from '@/lib/time'

/** What a building's week holds for its digests: read once, for every tenancy. */
export type WeekMaterial = {
  plan: BuildingPlan
  weekStart: string
  /** the rows that carry verdicts */
  verdicts: Awaited<ReturnType<typeof weekRows>>
  /** Monday to Sunday */
  runs: NightRun[]
  findings: Awaited<ReturnType<typeof findingRows>>
}

/** Reads what the digests of one building's week are made of. */
export async function weekMaterial(
  tx: Tx,
  { buildingId, weekStart }: { buildingId: number; weekStart: string },
): Promise<WeekMaterial> {
  const method = { buildingId, methodVersion: METHOD_VERSION }
  const rows = await weekRows(tx, { ...method, weekStart })
  return {
    plan: await requireBuildingPlan(tx, { buildingId }),
    weekStart,
    verdicts: rows.filter((row) => row.verdict !== null),
    runs: await finishedRuns(tx, { ...method, fromDate: weekStart, toDate: addDays(weekStart, 6) }),
    findings: await findingRows(tx, method),
  }
}

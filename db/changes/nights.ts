import { eq, ne, sql } from 'drizzle-orm'
import type { Tx } from '../client'
import { finishedRuns } from '../queries/nights'
import { decayReviews, nightRuns } from '../schema'
import { addAuditEvent } from './audit'
import { type NightResult, type ReviewToRefit, storeDecays } from './night-decays'
import { notifyLive } from './notice'

export type { DecayRow, FoundDecay, NightResult, ReviewToRefit } from './night-decays'

export type StoredNight = {
  changed: boolean
  added: number
  superseded: number
  reviewsToRefit: ReviewToRefit[]
}

const NOTHING_CHANGED: StoredNight = { changed: false, added: 0, superseded: 0, reviewsToRefit: [] }

async function storeRun(tx: Tx, night: NightResult): Promise<void> {
  const run = {
    state: 'done' as const,
    provisional: night.provisional,
    startedAt: night.startedAt,
    finishedAt: night.finishedAt,
    roomsAnalysed: night.roomsAnalysed,
    decaysFound: night.found.length,
    error: null,
    carried: night.carried,
  }
  const { organizationId, buildingId, date: localDate, methodVersion, inputHash } = night
  await tx
    .insert(nightRuns)
    .values({ organizationId, buildingId, localDate, methodVersion, inputHash, ...run })
    .onConflictDoUpdate({
      target: [nightRuns.buildingId, nightRuns.localDate, nightRuns.methodVersion, nightRuns.inputHash],
      set: run,
    })
}

/** Nights of one building are written one after the other, whoever runs them. */
export async function lockBuildingNights(tx: Tx, buildingId: number): Promise<void> {
  await tx.execute(sql`SELECT pg_advisory_xact_lock(hashtext('ebbmark nights'), ${buildingId})`)
}

/**
 * Writes what a run of one night found. The same inputs a second time change nothing. Decays that came out as they stood keep their rows;
 * those that did not are superseded, never overwritten, and their reviews follow to the decay that covers their window.
 */
export async function storeNight(tx: Tx, night: NightResult): Promise<StoredNight> {
  await lockBuildingNights(tx, night.buildingId)
  const { buildingId, methodVersion, date } = night
  const [last] = await finishedRuns(tx, { buildingId, methodVersion, fromDate: date, toDate: date })
  const same = last?.inputHash === night.inputHash && last.provisional === night.provisional
  if (same) return NOTHING_CHANGED
  const stored = await storeDecays(tx, night)
  await storeRun(tx, night)
  await notifyLive(tx, 'night', [buildingId])
  return { changed: true, ...stored }
}

/** Takes over what a reviewer's window gives after late readings; null figures where it gives none any more. The audit trail has both. */
export async function storeRefit(
  tx: Tx,
  { reviewId, rates }: { reviewId: number; rates: { rate: number; low: number; high: number } | null },
): Promise<void> {
  const [before] = await tx.select().from(decayReviews).where(eq(decayReviews.id, reviewId))
  if (!before) return
  const figures = {
    airChangeRatePerHour: rates?.rate ?? null,
    airChangeRateLowPerHour: rates?.low ?? null,
    airChangeRateHighPerHour: rates?.high ?? null,
  }
  await tx.update(decayReviews).set(figures).where(eq(decayReviews.id, reviewId))
  await addAuditEvent(tx, {
    organizationId: before.organizationId,
    userId: null,
    action: 'decay.refitted',
    subjectKind: 'decay review',
    subjectId: String(reviewId),
    detail: {
      from: {
        rate: before.airChangeRatePerHour,
        low: before.airChangeRateLowPerHour,
        high: before.airChangeRateHighPerHour,
      },
      to: rates,
      reason: 'readings of its window changed since the review',
    },
  })
}

/** Records that the analysis of a night failed and why, so that health and the next tick see it. */
export async function storeFailedNight(
  tx: Tx,
  night: Pick<
    NightResult,
    'organizationId' | 'buildingId' | 'date' | 'methodVersion' | 'inputHash' | 'provisional' | 'startedAt'
  > & { error: string },
): Promise<void> {
  const { date: localDate, error, ...rest } = night
  await tx
    .insert(nightRuns)
    .values({ ...rest, localDate, state: 'failed', error })
    .onConflictDoUpdate({
      target: [nightRuns.buildingId, nightRuns.localDate, nightRuns.methodVersion, nightRuns.inputHash],
      set: { state: 'failed', error, startedAt: night.startedAt },
      setWhere: ne(nightRuns.state, 'done'),
    })
}

/** Takes the marks of late readings up to `until` away: their nights are queued in the same transaction, and their hours are left to be rolled up again. */
export async function clearLateHours(
  tx: Tx,
  { buildingId, until }: { buildingId: number; until: Date },
): Promise<void> {
  await tx.execute(sql`
    WITH gone AS (DELETE FROM late_readings WHERE building_id = ${buildingId} AND received_at <= ${until} RETURNING building_id, hour)
    INSERT INTO rollup_hours (building_id, hour) SELECT building_id, hour FROM gone ON CONFLICT DO NOTHING`)
}

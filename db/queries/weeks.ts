import { and, asc, desc, eq, gte, inArray, isNull, lte } from 'drizzle-orm'
import type { Tx } from '../client'
import { decayReviews, decays, findings, latestReadings, placements, rateChanges, roomWeeks } from '../schema'

export type StandingReview = Awaited<ReturnType<typeof standingReviews>>[number]

/** Reviews of a building that were not withdrawn, with the decay each belongs to, of nights from `fromDate` to `toDate`. */
export function standingReviews(
  tx: Tx,
  { buildingId, fromDate, toDate }: { buildingId: number; fromDate: string; toDate: string },
) {
  return tx
    .select({ review: decayReviews, decay: decays })
    .from(decayReviews)
    .innerJoin(decays, eq(decays.id, decayReviews.decayId))
    .where(
      and(
        eq(decayReviews.buildingId, buildingId),
        isNull(decayReviews.withdrawnAt),
        gte(decays.night, fromDate),
        lte(decays.night, toDate),
      ),
    )
    .orderBy(asc(decayReviews.createdAt), asc(decayReviews.id))
}

/** A week's rows of one method version, in a fixed order. */
export function weekRows(
  tx: Tx,
  {
    buildingId,
    weekStart,
    methodVersion,
    roomIds,
  }: { buildingId: number; weekStart: string; methodVersion: string; roomIds?: readonly number[] },
) {
  return tx
    .select()
    .from(roomWeeks)
    .where(
      and(
        eq(roomWeeks.buildingId, buildingId),
        eq(roomWeeks.weekStart, weekStart),
        eq(roomWeeks.methodVersion, methodVersion),
        roomIds ? inArray(roomWeeks.roomId, [...roomIds]) : undefined,
      ),
    )
    .orderBy(roomWeeks.roomId, roomWeeks.mode)
}

/** Rate changes of a building by one method version, newest first. */
export function rateChangeRows(
  tx: Tx,
  { buildingId, methodVersion }: { buildingId: number; methodVersion: string },
) {
  return tx
    .select()
    .from(rateChanges)
    .where(and(eq(rateChanges.buildingId, buildingId), eq(rateChanges.methodVersion, methodVersion)))
    .orderBy(desc(rateChanges.onNight), rateChanges.id)
}

/** Findings of a building by one method version, in a fixed order. */
export function findingRows(
  tx: Tx,
  { buildingId, methodVersion }: { buildingId: number; methodVersion: string },
) {
  return tx
    .select()
    .from(findings)
    .where(and(eq(findings.buildingId, buildingId), eq(findings.methodVersion, methodVersion)))
    .orderBy(findings.kind, findings.subjectKey)
}

/** When each placed sensor of a building last spoke; without a row where it never did. */
export function lastHeard(tx: Tx, { buildingId }: { buildingId: number }) {
  return tx
    .select({ sensorId: latestReadings.sensorId, at: latestReadings.at })
    .from(latestReadings)
    .innerJoin(placements, eq(placements.sensorId, latestReadings.sensorId))
    .where(and(eq(placements.buildingId, buildingId), isNull(placements.toAt)))
    .orderBy(latestReadings.sensorId)
}

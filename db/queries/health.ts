import { asc, eq, inArray, max } from 'drizzle-orm'
import type { Tx } from '../client'
import { buildings, latestReadings, nightRuns, workerHeartbeats } from '../schema'

/** When the broker (with ingest inside, or ingest workers beside an outside broker) last said that it lives. */
export async function getBrokerHeartbeat(tx: Tx): Promise<Date | null> {
  const [row] = await tx
    .select({ at: max(workerHeartbeats.at) })
    .from(workerHeartbeats)
    .where(inArray(workerHeartbeats.kind, ['broker', 'ingest']))
  return row?.at ?? null
}

/** When the newest reading of any sensor was stored. */
export async function getLastReadingStored(tx: Tx): Promise<Date | null> {
  const [row] = await tx.select({ at: max(latestReadings.receivedAt) }).from(latestReadings)
  return row?.at ?? null
}

export type NewestNight = { timeZone: string; createdAt: Date; newestDone: string | null }

/** Each building's zone and the newest local date whose analysis is done. */
export async function listNewestNights(tx: Tx): Promise<NewestNight[]> {
  const newest = tx
    .select({ buildingId: nightRuns.buildingId, date: max(nightRuns.localDate).as('date') })
    .from(nightRuns)
    .where(eq(nightRuns.state, 'done'))
    .groupBy(nightRuns.buildingId)
    .as('newest')
  return tx
    .select({ timeZone: buildings.timeZone, createdAt: buildings.createdAt, newestDone: newest.date })
    .from(buildings)
    .leftJoin(newest, eq(newest.buildingId, buildings.id))
    .orderBy(asc(buildings.id))
}

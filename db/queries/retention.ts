import { asc, eq } from 'drizzle-orm'
import type { Tx } from '../client'
import { buildings, organizations } from '../schema'

/** Every building with how long its organisation keeps readings; null where the organisation says nothing. */
export function listKeptPeriods(tx: Tx): Promise<{ buildingId: number; readingsKeptDays: number | null }[]> {
  return tx
    .select({ buildingId: buildings.id, readingsKeptDays: organizations.readingsKeptDays })
    .from(buildings)
    .innerJoin(organizations, eq(organizations.id, buildings.organizationId))
    .orderBy(asc(buildings.id))
}

import { asc, eq } from 'drizzle-orm'
import type { Tx } from '../client'
import { closures } from '../schema'

/** Days on which a building is shut, local dates with both ends included, in order. */
export function listClosures(tx: Tx, { buildingId }: { buildingId: number }) {
  return tx
    .select({ name: closures.name, fromDate: closures.fromDate, toDate: closures.toDate })
    .from(closures)
    .where(eq(closures.buildingId, buildingId))
    .orderBy(asc(closures.fromDate))
}

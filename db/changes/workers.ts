import { and, inArray, lt } from 'drizzle-orm'
import type { Tx } from '../client'
import { workerHeartbeats } from '../schema'

/** Takes heartbeats away that are still silent since an instant. */
export async function removeHeartbeats(
  tx: Tx,
  { ids, before }: { ids: readonly string[]; before: Date },
): Promise<void> {
  await tx
    .delete(workerHeartbeats)
    .where(and(inArray(workerHeartbeats.id, [...ids]), lt(workerHeartbeats.at, before)))
}

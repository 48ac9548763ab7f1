import { and, eq, lt, ne } from 'drizzle-orm'
import type { Tx } from '../client'
import { workerHeartbeats } from '../schema'

type Kind = (typeof workerHeartbeats.$inferSelect)['kind']

/** Names of the processes of one kind that have said nothing since an instant. */
export async function silentWorkers(
  tx: Tx,
  { kind, before, except }: { kind: Kind; before: Date; except: string },
): Promise<string[]> {
  const rows = await tx
    .select({ id: workerHeartbeats.id })
    .from(workerHeartbeats)
    .where(
      and(eq(workerHeartbeats.kind, kind), lt(workerHeartbeats.at, before), ne(workerHeartbeats.id, except)),
    )
  return rows.map((row) => row.id)
}

import { sql } from 'drizzle-orm'
import { LIVE_CHANNEL, liveNotice } from '@/lib/wire/live'
import type { Tx } from '../client'

/** Tells open screens, when the transaction commits, what kind of thing changed and in which buildings ("many" for all). */
export async function notifyLive(
  tx: Tx,
  kind: string,
  buildingIds: Iterable<number> | 'many',
): Promise<void> {
  const notice = buildingIds === 'many' ? { v: 1, kind, buildings: 'many' } : liveNotice(kind, buildingIds)
  await tx.execute(sql`SELECT pg_notify(${LIVE_CHANNEL}, ${JSON.stringify(notice)})`)
}

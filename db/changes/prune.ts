import { lt, or } from 'drizzle-orm'
import type { Tx } from '../client'
import { sessions, signInEvents } from '../schema'

/** Removes sessions that expired or were ended before an instant. */
export async function pruneSessions(tx: Tx, { endedBefore }: { endedBefore: Date }): Promise<void> {
  await tx
    .delete(sessions)
    .where(or(lt(sessions.expiresAt, endedBefore), lt(sessions.revokedAt, endedBefore)))
}

/** Removes sign-in attempts from before an instant. */
export async function pruneSignInEvents(tx: Tx, { before }: { before: Date }): Promise<void> {
  await tx.delete(signInEvents).where(lt(signInEvents.at, before))
}

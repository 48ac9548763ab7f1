import { and, eq, isNull, sql } from 'drizzle-orm'
import type { Tx } from '../client'
import { memberships, sessions, signInEvents, users } from '../schema'
import { addAuditEvent } from './audit'
import { notifyLive } from './notice'

type Attempt = { email: string; address: string | null; at: Date }

/** Lets one attempt with this e-mail and from this address be counted at a time, until the transaction ends. */
export async function lockAttempts(tx: Tx, { email, address }: Omit<Attempt, 'at'>): Promise<void> {
  await tx.execute(sql`SELECT pg_advisory_xact_lock(7101, hashtext(${email}))`)
  if (address) await tx.execute(sql`SELECT pg_advisory_xact_lock(7102, hashtext(${address}))`)
}

/** Writes an attempt down before its password is checked: as wrong, so that attempts at the same time all count. */
export async function addAttempt(tx: Tx, attempt: Attempt, outcome: 'wrong' | 'limited'): Promise<number> {
  const [row] = await tx
    .insert(signInEvents)
    .values({ ...attempt, outcome })
    .returning({ id: signInEvents.id })
  if (!row) throw new Error('an attempt to sign in was not written')
  return row.id
}

/** Makes the attempt a sign-in and opens its session. */
export async function openSession(
  tx: Tx,
  given: {
    attemptId: number
    userId: number
    userVersion: number
    userAgent: string | null
    now: Date
    expiresAt: Date
  },
): Promise<{ sessionId: string; userPublicId: string }> {
  const { attemptId, now, ...session } = given
  await tx
    .update(signInEvents)
    .set({ outcome: 'signed-in', userId: given.userId })
    .where(eq(signInEvents.id, attemptId))
  const [opened] = await tx
    .insert(sessions)
    .values({ ...session, createdAt: now })
    .returning({ id: sessions.id })
  const [user] = await tx.select({ publicId: users.publicId }).from(users).where(eq(users.id, given.userId))
  if (!opened || !user) throw new Error('a session was not opened')
  return { sessionId: opened.id, userPublicId: user.publicId }
}

type Ending = { sessionId: string; userId: number; email: string; address: string | null; now: Date }

/** Ends one session; its open streams close at the notice. A session already ended stays as it was. */
export async function endSession(tx: Tx, { sessionId, userId, email, address, now }: Ending): Promise<void> {
  const ended = await tx
    .update(sessions)
    .set({ revokedAt: now })
    .where(and(eq(sessions.id, sessionId), eq(sessions.userId, userId), isNull(sessions.revokedAt)))
    .returning({ id: sessions.id })
  if (ended.length === 0) return
  await tx.insert(signInEvents).values({ at: now, email, address, outcome: 'signed-out', userId })
  await notifyLive(tx, 'session', 'many')
}

/** Ends every session of the person: their version rises, so a token made before is worth nothing. */
export async function endEverySession(tx: Tx, { userId, email, address, now }: Ending): Promise<void> {
  await tx
    .update(users)
    .set({ version: sql`${users.version} + 1` })
    .where(eq(users.id, userId))
  const ended = await tx
    .update(sessions)
    .set({ revokedAt: now })
    .where(and(eq(sessions.userId, userId), isNull(sessions.revokedAt)))
    .returning({ id: sessions.id })
  await tx.insert(signInEvents).values({ at: now, email, address, outcome: 'signed-out-everywhere', userId })
  const places = await tx
    .select({ organizationId: memberships.organizationId, publicId: users.publicId })
    .from(memberships)
    .innerJoin(users, eq(users.id, memberships.userId))
    .where(eq(memberships.userId, userId))
  for (const { organizationId, publicId } of places) {
    await addAuditEvent(tx, {
      organizationId,
      userId,
      action: 'person.signed-out-everywhere',
      subjectKind: 'person',
      subjectId: publicId,
      detail: { sessionsEnded: ended.length },
    })
  }
  await notifyLive(tx, 'session', 'many')
}

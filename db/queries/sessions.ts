import { and, arrayOverlaps, asc, count, desc, eq, gt, isNull, max, sql } from 'drizzle-orm'
import { type Membership, ROLES, type Role } from '@/lib/policy/roles'
import type { Tx } from '../client'
import { memberships, organizations, sessions, signInEvents, users } from '../schema'

export type Person = {
  id: number
  publicId: string
  email: string
  name: string
  units: 'si' | 'ip'
  isDemo: boolean
}

export type StandingSession = {
  sessionId: string
  person: Person
  organization: { id: number; name: string; isDemo: boolean }
  membership: Membership
}

/** The roles that a row names; a word that is no role gives nothing. */
function rolesIn(words: readonly string[]): Role[] {
  return ROLES.filter((role) => words.includes(role))
}

/**
 * The session, its person and their place in an organisation, if the session still stands: not revoked, not expired, of the
 * person's present version, and with a role. Someone in several organisations is shown the one they joined first.
 */
export async function getStandingSession(
  tx: Tx,
  { sessionId, now }: { sessionId: string; now: Date },
): Promise<StandingSession | undefined> {
  const [row] = await tx
    .select({ user: users, membership: memberships, organization: organizations })
    .from(sessions)
    .innerJoin(users, eq(users.id, sessions.userId))
    .innerJoin(memberships, eq(memberships.userId, users.id))
    .innerJoin(organizations, eq(organizations.id, memberships.organizationId))
    .where(
      and(
        eq(sessions.id, sessionId),
        isNull(sessions.revokedAt),
        gt(sessions.expiresAt, now),
        eq(sessions.userVersion, users.version),
        arrayOverlaps(memberships.roles, [...ROLES]),
      ),
    )
    .orderBy(asc(memberships.id))
    .limit(1)
  if (!row) return undefined
  const { user, membership, organization } = row
  return {
    sessionId,
    person: {
      id: user.id,
      publicId: user.publicId,
      email: user.email,
      name: user.name,
      units: user.units,
      isDemo: user.isDemo,
    },
    organization: { id: organization.id, name: organization.name, isDemo: organization.isDemo },
    membership: {
      userId: user.id,
      organizationId: membership.organizationId,
      roles: rolesIn(membership.roles),
      buildingIds: membership.buildingIds,
      tenancyId: membership.tenancyId,
    },
  }
}

/** Wrong tries since `since`, and the newest of them; for an e-mail, those after its last good sign-in. */
export type Tries = { wrong: number; lastWrongAt: Date | null }

/** Wrong tries with one e-mail since `since`; a good sign-in in between wipes the earlier ones. */
export async function countWrongByEmail(
  tx: Tx,
  { email, since }: { email: string; since: Date },
): Promise<Tries> {
  const [good] = await tx
    .select({ id: signInEvents.id })
    .from(signInEvents)
    .where(and(eq(signInEvents.email, email), eq(signInEvents.outcome, 'signed-in')))
    .orderBy(desc(signInEvents.id))
    .limit(1)
  const [row] = await tx
    .select({ wrong: count(), lastWrongAt: max(signInEvents.at) })
    .from(signInEvents)
    .where(
      and(
        eq(signInEvents.email, email),
        eq(signInEvents.outcome, 'wrong'),
        gt(signInEvents.at, since),
        gt(signInEvents.id, good?.id ?? 0),
      ),
    )
  return row ?? { wrong: 0, lastWrongAt: null }
}

/** Wrong tries from one network address since `since`, whatever the e-mail. */
export async function countWrongByAddress(
  tx: Tx,
  { address, since }: { address: string; since: Date },
): Promise<Tries> {
  const [row] = await tx
    .select({ wrong: count(), lastWrongAt: max(signInEvents.at) })
    .from(signInEvents)
    .where(
      and(
        sql`${signInEvents.address} = ${address}::inet`,
        eq(signInEvents.outcome, 'wrong'),
        gt(signInEvents.at, since),
      ),
    )
  return row ?? { wrong: 0, lastWrongAt: null }
}

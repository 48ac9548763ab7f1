import { and, arrayOverlaps, asc, eq, exists } from 'drizzle-orm'
import { ROLES, type Role } from '@/lib/policy/roles'
import type { Tx } from '../client'
import { buildings, memberships, tenancies, users } from '../schema'

export type Credential = { userId: number; version: number; passwordHash: string | null }

/** What is needed to check a password: of someone who has a role in an organisation. `email` in lower case. */
export async function getCredential(tx: Tx, { email }: { email: string }): Promise<Credential | undefined> {
  const [row] = await tx
    .select({ userId: users.id, version: users.version, passwordHash: users.passwordHash })
    .from(users)
    .where(
      and(
        eq(users.email, email),
        exists(
          tx
            .select()
            .from(memberships)
            .where(and(eq(memberships.userId, users.id), arrayOverlaps(memberships.roles, [...ROLES]))),
        ),
      ),
    )
  return row
}

/** The demo person with this e-mail, if there is one and it is marked as demo. */
export async function getDemoCredential(
  tx: Tx,
  { email }: { email: string },
): Promise<Credential | undefined> {
  const [row] = await tx
    .select({ userId: users.id, version: users.version, passwordHash: users.passwordHash })
    .from(users)
    .where(and(eq(users.email, email), eq(users.isDemo, true)))
  return row
}

export type BuildingSummary = { id: number; slug: string; name: string; timeZone: string }

/** The buildings in scope, by name: what the masthead offers and a page works on. */
export async function listBuildingsInScope(tx: Tx): Promise<BuildingSummary[]> {
  return tx
    .select({
      id: buildings.id,
      slug: buildings.slug,
      name: buildings.name,
      timeZone: buildings.timeZone,
    })
    .from(buildings)
    .orderBy(asc(buildings.name), asc(buildings.id))
}

/** The name of the tenancy a membership is restricted to. */
export async function getTenancyName(
  tx: Tx,
  { tenancyId }: { tenancyId: number },
): Promise<string | undefined> {
  const [row] = await tx.select({ name: tenancies.name }).from(tenancies).where(eq(tenancies.id, tenancyId))
  return row?.name
}

export type DemoPersonRow = { email: string; name: string; roles: Role[]; oneBuilding: boolean }

/** The people of the demo, in the order in which they were added; `oneBuilding` where the place is restricted to buildings alone. */
export async function listDemoPeople(tx: Tx): Promise<DemoPersonRow[]> {
  const rows = await tx
    .select({
      email: users.email,
      name: users.name,
      roles: memberships.roles,
      buildingIds: memberships.buildingIds,
      tenancyId: memberships.tenancyId,
    })
    .from(users)
    .innerJoin(memberships, eq(memberships.userId, users.id))
    .where(eq(users.isDemo, true))
    .orderBy(asc(users.id))
  return rows.map(({ email, name, roles, buildingIds, tenancyId }) => ({
    email,
    name,
    roles: ROLES.filter((role) => roles.includes(role)),
    oneBuilding: buildingIds !== null && tenancyId === null,
  }))
}

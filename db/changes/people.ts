import { and, eq } from 'drizzle-orm'
import type { Role } from '@/lib/policy/roles'
import type { Tx } from '../client'
import { newPublicId } from '../public-id'
import { memberships, users } from '../schema'
import { addAuditEvent } from './audit'
import { notifyLive } from './notice'

export type NewPerson = {
  organizationId: number
  email: string
  name: string
  passwordHash: string | null
  roles: readonly Role[]
  /** null: every building */
  buildingIds: readonly number[] | null
  /** null: not restricted to a tenancy */
  tenancyId: number | null
  isDemo?: boolean
}

/**
 * Adds a person to an organisation, or sets the place of one already there; idempotent. A changed password or place ends their
 * sessions (the version rises). `byUserId` is who did it, null for the program.
 */
export async function putPerson(
  tx: Tx,
  person: NewPerson,
  byUserId: number | null,
): Promise<{ userId: number; publicId: string }> {
  const email = person.email.trim().toLowerCase()
  const known = (await tx.select().from(users).where(eq(users.email, email)))[0]
  const user = known ?? (await addUser(tx, { ...person, email }))
  const placeChanged = await putMembership(tx, user.id, person)
  const passwordChanged = known !== undefined && known.passwordHash !== person.passwordHash
  if (known && (passwordChanged || placeChanged)) {
    await tx
      .update(users)
      .set({ passwordHash: person.passwordHash, version: known.version + 1 })
      .where(eq(users.id, known.id))
    await notifyLive(tx, 'session', 'many')
  }
  if (!known || passwordChanged || placeChanged) {
    await addAuditEvent(tx, {
      organizationId: person.organizationId,
      userId: byUserId,
      action: known ? 'person.changed' : 'person.added',
      subjectKind: 'person',
      subjectId: user.publicId,
      detail: {
        to: { roles: person.roles, buildingIds: person.buildingIds, tenancyId: person.tenancyId },
        passwordChanged,
      },
    })
  }
  return { userId: user.id, publicId: user.publicId }
}

async function addUser(tx: Tx, { email, name, passwordHash, isDemo }: NewPerson) {
  const [user] = await tx
    .insert(users)
    .values({ publicId: newPublicId(), email, name, passwordHash, isDemo: isDemo ?? false })
    .returning()
  if (!user) throw new Error(`the person ${email} was not added`)
  return user
}

/** True when an existing place became another. */
async function putMembership(tx: Tx, userId: number, person: NewPerson): Promise<boolean> {
  const place = {
    roles: [...person.roles],
    buildingIds: person.buildingIds === null ? null : [...person.buildingIds],
    tenancyId: person.tenancyId,
  }
  const ofPerson = and(eq(memberships.userId, userId), eq(memberships.organizationId, person.organizationId))
  const [old] = await tx.select().from(memberships).where(ofPerson)
  if (!old) {
    await tx.insert(memberships).values({ ...place, userId, organizationId: person.organizationId })
    return false
  }
  const same =
    JSON.stringify([old.roles, old.buildingIds, old.tenancyId]) ===
    JSON.stringify([place.roles, place.buildingIds, place.tenancyId])
  if (!same) await tx.update(memberships).set(place).where(ofPerson)
  return !same
}

import { and, eq, isNull, lt, or } from 'drizzle-orm'
import type { KeyScope } from '@/lib/policy/key-scopes'
import { newApiKey } from '../api-key'
import type { Tx } from '../client'
import { newPublicId } from '../public-id'
import { apiAnswers, apiKeys } from '../schema'
import { addAuditEvent } from './audit'

/** Makes a key for one building (null: all of the organisation) and writes it down; answers the key itself, this once. */
export async function createApiKey(
  tx: Tx,
  given: {
    organizationId: number
    buildingId: number | null
    /** null where it was made from the command line */
    userId: number | null
    name: string
    scopes: readonly KeyScope[]
    now: Date
  },
): Promise<{ publicId: string; key: string }> {
  const { key, sha256, beginsWith } = newApiKey()
  const publicId = newPublicId()
  const { organizationId, buildingId, userId, name, scopes, now } = given
  await tx.insert(apiKeys).values({
    publicId,
    organizationId,
    buildingId,
    name,
    beginsWith,
    keySha256: sha256,
    scopes: [...scopes],
    createdBy: userId,
    createdAt: now,
  })
  await addAuditEvent(tx, {
    organizationId,
    userId,
    action: 'api-key.created',
    subjectKind: 'api-key',
    subjectId: publicId,
    detail: { to: { name, beginsWith, scopes, buildingId } },
  })
  return { publicId, key }
}

/** Ends a key: it is refused from its next request on. False where there is none that stands. */
export async function revokeApiKey(
  tx: Tx,
  {
    publicId,
    organizationId,
    userId,
    now,
  }: { publicId: string; organizationId: number; userId: number | null; now: Date },
): Promise<boolean> {
  const [revoked] = await tx
    .update(apiKeys)
    .set({ revokedAt: now })
    .where(
      and(
        eq(apiKeys.publicId, publicId),
        eq(apiKeys.organizationId, organizationId),
        isNull(apiKeys.revokedAt),
      ),
    )
    .returning({ name: apiKeys.name })
  if (!revoked) return false
  await addAuditEvent(tx, {
    organizationId,
    userId,
    action: 'api-key.revoked',
    subjectKind: 'api-key',
    subjectId: publicId,
    detail: { from: { name: revoked.name } },
  })
  return true
}

/** Writes down that a key was used, at most once a minute. */
export async function noteKeyUse(tx: Tx, { id, now }: { id: number; now: Date }): Promise<void> {
  const before = new Date(now.getTime() - 60_000)
  await tx
    .update(apiKeys)
    .set({ lastUsedAt: now })
    .where(and(eq(apiKeys.id, id), or(isNull(apiKeys.lastUsedAt), lt(apiKeys.lastUsedAt, before))))
}

/** How long the answer to an idempotency key is kept. */
export const ANSWER_KEPT_MS = 86_400_000

/** Removes answers from before an instant. */
export async function pruneApiAnswers(tx: Tx, { before }: { before: Date }): Promise<void> {
  await tx.delete(apiAnswers).where(lt(apiAnswers.at, before))
}

import { and, eq, isNull } from 'drizzle-orm'
import type { Tx } from '../client'
import { apiKeys } from '../schema'

/** A key that stands: whose it is and what it may. `buildingId` null: every building of the organisation. */
export type StandingKey = {
  id: number
  publicId: string
  organizationId: number
  buildingId: number | null
  scopes: string[]
}

/** The key of this hash unless it is revoked. */
export async function findStandingKey(tx: Tx, { sha256 }: { sha256: string }): Promise<StandingKey | null> {
  const [found] = await tx
    .select({
      id: apiKeys.id,
      publicId: apiKeys.publicId,
      organizationId: apiKeys.organizationId,
      buildingId: apiKeys.buildingId,
      scopes: apiKeys.scopes,
    })
    .from(apiKeys)
    .where(and(eq(apiKeys.keySha256, sha256), isNull(apiKeys.revokedAt)))
  return found ?? null
}

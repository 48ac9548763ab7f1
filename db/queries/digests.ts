import { and, desc, eq, gt, isNull, lt, or, sql } from 'drizzle-orm'
import type { Tx } from '../client'
import { buildings, digestDeliveries, digests, roomTenancies, tenancies } from '../schema'

/** Tenancies of a building that hold a room now and have no digest of the week yet. */
export function tenanciesWithoutDigest(
  tx: Tx,
  { buildingId, weekStart }: { buildingId: number; weekStart: string },
) {
  const endOfWeek = sql`(${weekStart}::date + 7)`
  return tx
    .selectDistinct({
      id: tenancies.id,
      organizationId: tenancies.organizationId,
      name: tenancies.name,
      digestEmails: tenancies.digestEmails,
    })
    .from(tenancies)
    .innerJoin(roomTenancies, eq(roomTenancies.tenancyId, tenancies.id))
    .leftJoin(digests, and(eq(digests.tenancyId, tenancies.id), eq(digests.weekStart, weekStart)))
    .where(
      and(
        eq(tenancies.buildingId, buildingId),
        isNull(digests.id),
        lt(roomTenancies.fromAt, endOfWeek),
        or(isNull(roomTenancies.toAt), gt(roomTenancies.toAt, sql`${weekStart}::date`)),
      ),
    )
    .orderBy(tenancies.id)
}

/** True where a tenancy of the building has no digest of the week yet. */
export async function hasDigestsToWrite(
  tx: Tx,
  week: { buildingId: number; weekStart: string },
): Promise<boolean> {
  return (await tenanciesWithoutDigest(tx, week)).length > 0
}

/** Digests in scope, newest week first, by tenancy. `content` is to be read with digestContentSchema. */
export function listDigests(tx: Tx, { buildingId, limit }: { buildingId: number; limit: number }) {
  return tx
    .select({
      publicId: digests.publicId,
      weekStart: digests.weekStart,
      tenancy: tenancies.name,
      content: digests.content,
      createdAt: digests.createdAt,
    })
    .from(digests)
    .innerJoin(tenancies, eq(tenancies.id, digests.tenancyId))
    .where(eq(digests.buildingId, buildingId))
    .orderBy(desc(digests.weekStart), tenancies.name)
    .limit(limit)
}

/** One digest in scope, or undefined. */
export async function getDigest(tx: Tx, { publicId }: { publicId: string }) {
  const [row] = await tx
    .select({
      digest: digests,
      tenancy: { publicId: tenancies.publicId, name: tenancies.name, digestEmails: tenancies.digestEmails },
    })
    .from(digests)
    .innerJoin(tenancies, eq(tenancies.id, digests.tenancyId))
    .where(eq(digests.publicId, publicId))
  return row
}

/** Who a digest went or goes to, and how far it has come. */
export function listDeliveries(tx: Tx, { digestId }: { digestId: number }) {
  return tx
    .select()
    .from(digestDeliveries)
    .where(eq(digestDeliveries.digestId, digestId))
    .orderBy(digestDeliveries.id)
}

/** One delivery with what is to be delivered, or undefined. */
export async function getDelivery(tx: Tx, { deliveryId }: { deliveryId: number }) {
  const [row] = await tx
    .select({ delivery: digestDeliveries, digest: digests, building: { slug: buildings.slug } })
    .from(digestDeliveries)
    .innerJoin(digests, eq(digests.id, digestDeliveries.digestId))
    .innerJoin(buildings, eq(buildings.id, digests.buildingId))
    .where(eq(digestDeliveries.id, deliveryId))
  return row
}

import { eq } from 'drizzle-orm'
import type { DigestContent } from '@/lib/wire/digests'
import type { Tx } from '../client'
import { newPublicId } from '../public-id'
import { digestDeliveries, digests } from '../schema'
import { addAuditEvent } from './audit'
import { queueJob } from './jobs'
import { notifyLive } from './notice'

export type NewDigest = {
  organizationId: number
  buildingId: number
  tenancyId: number
  weekStart: string
  content: DigestContent
  /** who it is mailed to; none for a week long past */
  receivers: readonly string[]
  now: Date
}

/**
 * Stores a tenancy's digest of a week and queues its mail in the same transaction. A week's digest is written once: where one stands,
 * nothing happens. Returns its public id, or null where one stood.
 */
export async function storeDigest(tx: Tx, digest: NewDigest): Promise<string | null> {
  const { organizationId, buildingId, tenancyId, weekStart, content, now } = digest
  const publicId = newPublicId()
  const [row] = await tx
    .insert(digests)
    .values({ publicId, organizationId, buildingId, tenancyId, weekStart, content, createdAt: now })
    .onConflictDoNothing()
    .returning({ id: digests.id })
  if (!row) return null
  await queueDeliveries(tx, { organizationId, digestId: row.id, receivers: digest.receivers, now })
  await notifyLive(tx, 'digest', [buildingId])
  return publicId
}

async function queueDeliveries(
  tx: Tx,
  mail: { organizationId: number; digestId: number; receivers: readonly string[]; now: Date },
): Promise<number> {
  const { organizationId, digestId, now } = mail
  const emails = [...new Set(mail.receivers.map((email) => email.trim().toLowerCase()))].filter(Boolean)
  for (const email of emails) {
    const [delivery] = await tx
      .insert(digestDeliveries)
      .values({ organizationId, digestId, email, state: 'queued', createdAt: now })
      .onConflictDoUpdate({
        target: [digestDeliveries.digestId, digestDeliveries.email],
        set: { state: 'queued', error: null, createdAt: now },
      })
      .returning({ id: digestDeliveries.id })
    if (delivery) await queueJob(tx, { task: 'send-digest', payload: { deliveryId: delivery.id } })
  }
  return emails.length
}

/** Sends a digest (again) now, to these receivers: a person's wish, kept in the audit trail. Returns how many mails were queued. */
export async function sendDigestNow(
  tx: Tx,
  actor: { organizationId: number; userId: number },
  send: { digestId: number; publicId: string; receivers: readonly string[]; now: Date },
): Promise<number> {
  const { digestId, publicId, receivers, now } = send
  const queued = await queueDeliveries(tx, {
    organizationId: actor.organizationId,
    ...{ digestId, receivers, now },
  })
  await addAuditEvent(tx, {
    ...actor,
    action: 'digest.sent',
    subjectKind: 'digest',
    subjectId: publicId,
    detail: { to: receivers },
  })
  return queued
}

/** The mail server took the message. */
export async function markDelivered(
  tx: Tx,
  { deliveryId, messageId, now }: { deliveryId: number; messageId: string; now: Date },
): Promise<void> {
  await tx
    .update(digestDeliveries)
    .set({ state: 'sent', messageId, error: null, sentAt: now })
    .where(eq(digestDeliveries.id, deliveryId))
}

/** An attempt failed; after the last one the delivery has failed for good. */
export async function markUndelivered(
  tx: Tx,
  { deliveryId, error, final }: { deliveryId: number; error: string; final: boolean },
): Promise<void> {
  await tx
    .update(digestDeliveries)
    .set({ state: final ? 'failed' : 'queued', error: error.slice(0, 1000) })
    .where(eq(digestDeliveries.id, deliveryId))
}

import { and, eq, gt, isNull, lt } from 'drizzle-orm'
import { Refusal } from '@/lib/errors'
import type { ReviewForm } from '@/lib/forms/review'
import type { Tx } from '../client'
import { findDecayRow } from '../queries/decay-detail'
import { decayReviews } from '../schema'
import { addAuditEvent } from './audit'
import { queueJob } from './jobs'
import { notifyLive } from './notice'

/** The refit of a moved window, computed on the server from the readings (never taken from the browser). */
export type Refit = { rate: number; low: number; high: number }

/**
 * Keeps an engineer's decision on a decay. An earlier decision on the same interval is withdrawn, not erased; the first fit stays. The
 * room's weeks are judged again.
 */
export async function reviewDecay(
  tx: Tx,
  actor: { organizationId: number; userId: number },
  { form, refit, now }: { form: ReviewForm; refit: Refit | null; now: Date },
): Promise<void> {
  const decay = await findDecayRow(tx, { publicId: form.decayId })
  if (!decay)
    throw new Refusal(
      'not-found',
      'This decay was analysed again meanwhile, or is not yours to see. Open it from the list.',
    )
  if (form.decision === 'keep' && decay.quality === 'refused') {
    throw new Refusal(
      'invalid',
      'A refused decay has no figure to keep. Move its window to one that can be fitted, or leave it out.',
    )
  }
  const window = form.decision === 'keep with window'
  const fromAt = window && form.fromS !== undefined ? new Date(form.fromS * 1000) : decay.startAt
  const toAt = window && form.toS !== undefined ? new Date(form.toS * 1000) : decay.endAt
  const earlier = await tx
    .update(decayReviews)
    .set({ withdrawnAt: now })
    .where(
      and(
        eq(decayReviews.sensorId, decay.sensorId),
        isNull(decayReviews.withdrawnAt),
        lt(decayReviews.fromAt, decay.endAt),
        gt(decayReviews.toAt, decay.startAt),
      ),
    )
    .returning({ decision: decayReviews.decision })
  await tx.insert(decayReviews).values({
    organizationId: actor.organizationId,
    buildingId: decay.buildingId,
    roomId: decay.roomId,
    sensorId: decay.sensorId,
    decayId: decay.id,
    decision: form.decision,
    fromAt,
    toAt,
    airChangeRatePerHour: refit?.rate ?? null,
    airChangeRateLowPerHour: refit?.low ?? null,
    airChangeRateHighPerHour: refit?.high ?? null,
    reason: form.reason,
    createdBy: actor.userId,
    createdAt: now,
  })
  await addAuditEvent(tx, {
    ...actor,
    action: 'decay.reviewed',
    subjectKind: 'decay',
    subjectId: decay.publicId,
    detail: {
      from: earlier[0]?.decision ?? null,
      to: form.decision,
      reason: form.reason,
      window: { fromAt, toAt },
      refit,
    },
  })
  await queueJob(tx, {
    task: 'judge-weeks',
    payload: { buildingId: decay.buildingId, fromDate: decay.night, toDate: decay.night },
  })
  await notifyLive(tx, 'night', [decay.buildingId])
}

import { z } from 'zod'
import { markDelivered, markUndelivered } from '@/db/changes/digests'
import { getDelivery } from '@/db/queries/digests'
import { paths } from '@/lib/paths'
import { digestMail } from '@/lib/server/mail/digest'
import { digestContentSchema } from '@/lib/wire/digests'
import { defineJob } from '../job'
import { idSchema } from './payloads'

/** One digest to one receiver. Tried again with growing delay while the mail server does not take it. */
export const sendDigestJob = defineJob({
  task: 'send-digest',
  payload: z.object({ deliveryId: idSchema }),
  run: async ({ deliveryId }, { database, clock, mailer, publicUrl, attempt }) => {
    const found = await database.asSystem('send digest', (tx) => getDelivery(tx, { deliveryId }))
    // sent in an attempt whose end was not recorded by the queue
    if (!found || found.delivery.state === 'sent') return
    const { delivery, digest } = found
    const mail = await digestMail(digestContentSchema.parse(digest.content), {
      pageUrl: new URL(paths.digest(digest.publicId), publicUrl).href,
    })
    try {
      const { messageId } = await mailer.send({
        ...mail,
        to: delivery.email,
        messageId: `digest-${digest.publicId}-${delivery.id}-${delivery.createdAt.getTime()}@${new URL(publicUrl).hostname}`,
      })
      await database.asSystem('send digest', (tx) =>
        markDelivered(tx, { deliveryId, messageId, now: clock.now() }),
      )
    } catch (error) {
      const words = error instanceof Error ? error.message : String(error)
      await database.asSystem('send digest', (tx) =>
        markUndelivered(tx, { deliveryId, error: words, final: attempt.last }),
      )
      throw error
    }
  },
})

'use server'

import { z } from 'zod'
import { sendDigestNow } from '@/db/changes/digests'
import { getDigest } from '@/db/queries/digests'
import { Refusal } from '@/lib/errors'
import { systemClock } from '@/lib/server/clock'
import { action } from '@/lib/server/http/action'

const send = action({
  permission: 'digest.send',
  schema: z.object({ digestId: z.string() }),
  run: async (person, { digestId: publicId }) =>
    person.change(async (tx) => {
      const found = await getDigest(tx, { publicId })
      if (!found) throw new Refusal('not-found', 'There is no such digest, or it is not yours to send.')
      const receivers = found.tenancy.digestEmails
      if (receivers.length === 0)
        throw new Refusal(
          'invalid',
          'Nobody is entered to receive this letter. Ask your administrator to add someone.',
        )
      const actor = { organizationId: person.scope.organizationId, userId: person.scope.userId }
      return {
        queued: await sendDigestNow(tx, actor, {
          digestId: found.digest.id,
          publicId,
          receivers,
          now: systemClock.now(),
        }),
      }
    }),
})

/** Sends one week's letter again to everyone who receives it. */
export async function sendDigestAction(earlier: unknown, form: FormData) {
  return send(earlier, form)
}

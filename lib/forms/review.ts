import { z } from 'zod'
import { decisions } from '@/lib/wire/decays'

/** An engineer's decision on one decay. A reason is asked for when leaving out or moving the window. */
export const reviewForm = z
  .object({
    decayId: z.string().min(1),
    decision: z.enum(decisions, { error: 'Choose keep, leave out, or keep with your window.' }),
    reason: z.string().trim().max(2000, 'Keep the reason under 2000 signs.').default(''),
    fromS: z.coerce.number().optional(),
    toS: z.coerce.number().optional(),
  })
  .refine((form) => form.decision === 'keep' || form.reason.length >= 3, {
    path: ['reason'],
    message: 'Say why, in a few words: it stays in the audit trail beside the first fit.',
  })
  .refine(
    (form) =>
      form.decision !== 'keep with window' ||
      (form.fromS !== undefined && form.toS !== undefined && form.toS > form.fromS),
    {
      path: ['fromS'],
      message: 'The window must end after it starts: move its edges on the chart.',
    },
  )
export type ReviewForm = z.infer<typeof reviewForm>

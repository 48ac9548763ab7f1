import type { FeedTrial } from '@/lib/wire/feeds'

/** What an action of the feeds answers. */
export type Answer<T> =
  | { ok: true; value: T }
  | { ok: false; detail: string; fields?: Record<string, string[]> }

export type FeedAction<T> = (input: unknown) => Promise<Answer<T>>
export type TryAction = FeedAction<FeedTrial>

/** Said where the answer did not come. */
export const NO_ANSWER =
  'Nothing was sent or changed: the connection to Ebbmark is gone. Try again when it is back.'

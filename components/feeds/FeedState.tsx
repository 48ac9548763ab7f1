import { counted } from '@/lib/format/counts'
import { spanWords } from '@/lib/format/spans'
import type { FeedRow } from '@/lib/wire/feeds'

/** Off, connected, or why not: in words, the cause beside it. */
export function FeedState({ feed, nowS }: { feed: FeedRow; nowS: number }) {
  if (!feed.enabled) return <>Switched off. Nothing of it is stored.</>
  if (feed.connectedS === null)
    return (
      <>
        <span className="font-[600] text-silt-ink">Not connected</span>
        {feed.lastError ? `: ${feed.lastError}.` : ' yet.'} It tries again by itself.
      </>
    )
  const heard =
    feed.lastMessageS === null
      ? 'nothing has come yet'
      : `last message ${spanWords(nowS - feed.lastMessageS)} ago`
  return (
    <>
      Connected for {spanWords(nowS - feed.connectedS)}, {heard}.{' '}
      {feed.refusals > 0 && `${counted(feed.refusals, 'value')} refused since it began.`}
    </>
  )
}

import Link from 'next/link'
import { Table, Td, Th, Tr } from '@/components/ui/Table'
import { spaced } from '@/lib/format/counts'
import { paths } from '@/lib/paths'
import type { FeedRow } from '@/lib/wire/feeds'
import { FeedState } from './FeedState'

/** Feeds with their state and what has come through them. */
export function FeedTable({ feeds, nowS }: { feeds: readonly FeedRow[]; nowS: number }) {
  return (
    <Table caption="Feeds with their state and counts">
      <thead>
        <tr>
          <Th>Feed</Th>
          <Th>State</Th>
          <Th numeric className="max-sm:hidden">
            Messages
          </Th>
          <Th numeric className="max-md:hidden">
            Readings
          </Th>
          <Th numeric className="max-md:hidden">
            Refused
          </Th>
        </tr>
      </thead>
      <tbody>
        {feeds.map((feed) => (
          <Tr key={feed.id}>
            <Td>
              <Link href={paths.feed(feed.id)}>{feed.name}</Link>
              <span className="fig block text-[13px] break-all text-ink-3">{feed.topicFilter}</span>
            </Td>
            <Td className="max-w-[30em] text-2">
              <FeedState feed={feed} nowS={nowS} />
            </Td>
            <Td numeric className="max-sm:hidden">
              {spaced(feed.messages)}
            </Td>
            <Td numeric className="max-md:hidden">
              {spaced(feed.readings)}
            </Td>
            <Td numeric className="max-md:hidden">
              {spaced(feed.refusals)}
            </Td>
          </Tr>
        ))}
      </tbody>
    </Table>
  )
}

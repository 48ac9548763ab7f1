import type { Metadata } from 'next'
import { notFound } from 'next/navigation'
import { FeedCandidates, FeedRefusals } from '@/components/feeds/FeedLists'
import { FeedState } from '@/components/feeds/FeedState'
import { FeedSwitch } from '@/components/feeds/FeedSwitch'
import { mappingRows } from '@/components/feeds/mapping-rows'
import { RemoveFeed } from '@/components/feeds/RemoveFeed'
import { Crumbs, MarginSection, Page, PageHead, WithMargin } from '@/components/ui/Page'
import { Pairs } from '@/components/ui/Table'
import { getFeed } from '@/db/queries/feeds'
import { paths } from '@/lib/paths'
import { systemClock } from '@/lib/server/clock'
import { requirePage } from '@/lib/server/http/page'
import { removeFeedAction, switchFeedAction, tryFeedAction } from '../actions'

export const metadata: Metadata = { title: 'Feed' }

/** One feed: whether it works, what it refused, which devices it names, and its switch. */
export default async function FeedPage({ params }: { params: Promise<{ feed: string }> }) {
  const page = await requirePage('settings.manage')
  const publicId = decodeURIComponent((await params).feed)
  const found = await page.read((tx) => getFeed(tx, { publicId }))
  if (!found) notFound()
  const { row, mapping, refusals, candidates } = found
  const nowS = systemClock.now().getTime() / 1000
  const timeZone = page.building?.timeZone ?? 'UTC'
  return (
    <Page>
      <Crumbs crumbs={[{ word: 'Feeds', href: paths.feeds() }, { word: row.name }]} />
      <PageHead title={row.name} lead={<FeedState feed={row} nowS={nowS} />} />
      <WithMargin
        margin={
          <>
            {' '}
            <MarginSection title="How it is read">
              <Pairs
                rows={[
                  {
                    key: 'broker',
                    name: 'Broker',
                    value: <span className="fig text-2">{row.brokerUrl}</span>,
                  },
                  {
                    key: 'filter',
                    name: 'Topics',
                    value: <span className="fig text-2">{row.topicFilter}</span>,
                  },
                  { key: 'building', name: 'Building', value: row.building },
                  ...mappingRows(mapping),
                ]}
              />
            </MarginSection>
            <MarginSection title="No longer needed?">
              <RemoveFeed id={row.id} name={row.name} remove={removeFeedAction} />
            </MarginSection>
          </>
        }
      >
        <FeedSwitch id={row.id} enabled={row.enabled} turn={switchFeedAction} tryOut={tryFeedAction} />
        <FeedCandidates candidates={candidates} nowS={nowS} />
        <FeedRefusals refusals={refusals} timeZone={timeZone} />
      </WithMargin>
    </Page>
  )
}

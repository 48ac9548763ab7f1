import type { Metadata } from 'next'
import { FeedTable } from '@/components/feeds/FeedTable'
import { ButtonLink } from '@/components/ui/Button'
import { Page, PageHead } from '@/components/ui/Page'
import { EmptyState } from '@/components/ui/States'
import { listFeeds } from '@/db/queries/feeds'
import { counted, sentenceCase } from '@/lib/format/counts'
import { paths } from '@/lib/paths'
import { systemClock } from '@/lib/server/clock'
import { requirePage } from '@/lib/server/http/page'
import type { FeedRow } from '@/lib/wire/feeds'

export const metadata: Metadata = { title: 'Feeds' }

/** Every feed from another system, with its errors and counts. */
export default async function FeedsPage() {
  const page = await requirePage('settings.manage')
  const feeds = await page.read(listFeeds)
  return (
    <Page>
      <PageHead
        title={headline(feeds)}
        lead="A feed takes readings of registered sensors from a broker that another system already publishes to."
        end={
          page.building && (
            <ButtonLink href={paths.newFeed()} look="main">
              Describe a feed
            </ButtonLink>
          )
        }
      />
      {feeds.length > 0 ? (
        <FeedTable feeds={feeds} nowS={systemClock.now().getTime() / 1000} />
      ) : (
        <EmptyState level={2} title="Nothing is fed from another system yet">
          Sensors that publish to Ebbmark themselves need no feed. Where another system has their readings on
          an MQTT broker, describe where they stand in its messages; you see what would be stored before you
          switch it on.
        </EmptyState>
      )}
    </Page>
  )
}

/** The finding: how many feeds that are on do not work. */
function headline(feeds: readonly FeedRow[]): string {
  const on = feeds.filter(({ enabled }) => enabled)
  const broken = on.filter(({ connectedS }) => connectedS === null).length
  if (feeds.length === 0) return 'Feeds'
  if (on.length === 0) return 'No feed is switched on'
  if (broken === 0) return `${sentenceCase(counted(on.length, 'feed'))} on, all connected`
  return `${sentenceCase(counted(broken, 'feed'))} of ${on.length} ${broken === 1 ? 'is' : 'are'} not connected`
}

import type { Metadata } from 'next'
import { FeedFormView } from '@/components/feeds/FeedFormView'
import { Crumbs, Page, PageHead } from '@/components/ui/Page'
import { EmptyState } from '@/components/ui/States'
import { paths } from '@/lib/paths'
import { requirePage } from '@/lib/server/http/page'
import { saveFeedAction, tryNewFeedAction } from '../actions'

export const metadata: Metadata = { title: 'Describe a feed' }

/** Describes a feed, tries it, and keeps it switched off. */
export default async function NewFeedPage() {
  const { building } = await requirePage('settings.manage')
  return (
    <Page>
      <Crumbs crumbs={[{ word: 'Feeds', href: paths.feeds() }, { word: 'Describe a feed' }]} />
      {building ? (
        <>
          <PageHead
            title="Describe a feed"
            lead={`For sensors registered in ${building.name}. Nothing is stored before you switch it on.`}
          />
          <FeedFormView building={building.slug} save={saveFeedAction} tryOut={tryNewFeedAction} />
        </>
      ) : (
        <EmptyState title="No building yet">A feed belongs to a building, and none is yours yet.</EmptyState>
      )}
    </Page>
  )
}

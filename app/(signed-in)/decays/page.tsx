import type { Metadata } from 'next'
import Link from 'next/link'
import { DecayList } from '@/components/decays/DecayList'
import { type FilterGroup, Filters } from '@/components/ui/Filters'
import { Caution, Page, PageHead } from '@/components/ui/Page'
import { EmptyState } from '@/components/ui/States'
import { countDecays, listDecays } from '@/db/queries/decays'
import { counted, sentenceCase } from '@/lib/format/counts'
import { nightWords } from '@/lib/format/nights'
import { withQuery } from '@/lib/format/query'
import { paths } from '@/lib/paths'
import { systemClock } from '@/lib/server/clock'
import { requirePage } from '@/lib/server/http/page'
import { addDays, localDate } from '@/lib/time'
import { decayListQuerySchema } from '@/lib/wire/decays'

export const metadata: Metadata = { title: 'Decays' }

const pageSize = 60
const shows = ['to review', 'accepted', 'doubtful', 'refused', 'all'] as const

/** The review queue: doubtful decays first, and every other one a filter away. */
export default async function DecaysPage({
  searchParams,
}: {
  searchParams: Promise<Record<string, string | string[] | undefined>>
}) {
  const page = await requirePage('decay.read')
  const { building } = page
  if (!building) {
    return (
      <Page>
        <EmptyState title="No building yet">
          Nobody has given you a building to work on. Ask your administrator to add you to one.
        </EmptyState>
      </Page>
    )
  }
  const parsed = decayListQuerySchema.safeParse(await searchParams)
  const query = parsed.success ? parsed.data : decayListQuerySchema.parse({})
  const sinceNight = addDays(
    localDate(systemClock.now().getTime() / 1000, building.timeZone),
    -7 * query.weeks,
  )
  const { counts, decays } = await page.read(async (tx) => ({
    counts: await countDecays(tx, { buildingId: building.id, sinceNight }),
    decays: await listDecays(tx, {
      buildingId: building.id,
      show: query.show,
      roomPublicId: query.room,
      mode: query.mode,
      sinceNight,
      beforeS: query.before,
      limit: pageSize,
    }),
  }))
  const link = (change: Record<string, string | undefined>) =>
    withQuery(
      paths.decays(),
      { show: query.show, weeks: String(query.weeks), room: query.room, mode: query.mode },
      change,
    )
  const waiting = counts['to review']
  const total = counts.accepted + counts.doubtful + counts.refused
  const countOf = { ...counts, all: total }
  const groups: FilterGroup[] = [
    {
      label: 'Show',
      choices: shows.map((show) => ({
        word: show,
        href: link({ show }),
        current: query.show === show,
        count: countOf[show],
      })),
    },
    {
      label: 'Weeks',
      choices: ['1', '4', '12'].map((weeks) => ({
        word: weeks,
        href: link({ weeks }),
        current: String(query.weeks) === weeks,
      })),
    },
    {
      label: 'Mode',
      choices: [undefined, 'supply on', 'supply reduced', 'supply off', 'natural', 'unknown'].map((mode) => ({
        word: mode ?? 'all',
        href: link({ mode }),
        current: query.mode === mode,
      })),
    },
  ]
  return (
    <Page>
      <PageHead
        title={
          waiting === 0 ? 'No decay waits for review' : `${sentenceCase(counted(waiting, 'decay'))} to review`
        }
        lead={`${counted(total, 'decay')} found in ${counted(query.weeks, 'week')}: ${counts.accepted} accepted, ${counts.doubtful} doubtful, ${counts.refused} refused with their reasons.`}
      />
      <Filters groups={groups} />
      {decays.length === 0 ? (
        <EmptyState
          level={2}
          title={query.show === 'to review' ? 'Nothing to decide' : 'No decay fits this choice'}
        >
          {query.show === 'to review'
            ? 'Every doubtful decay of these weeks has a decision. Choose “all” to look at the others.'
            : 'Choose other words above, or more weeks.'}
        </EmptyState>
      ) : (
        <DecayList decays={decays} timeZone={building.timeZone} max={8} nightWords={nightWords} />
      )}
      {decays.length === pageSize && (
        <p className="mt-4 text-2">
          <Link href={link({ before: String(Math.floor(decays.at(-1)?.startS ?? 0)) })}>Earlier decays</Link>
        </p>
      )}
      <Caution>
        A decay left out or refused stays on file with its reason; it is never replaced by a default.
      </Caution>
    </Page>
  )
}

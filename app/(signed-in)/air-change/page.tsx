import { formatInTimeZone } from 'date-fns-tz'
import type { Metadata } from 'next'
import { AirChangeTable } from '@/components/air-change/AirChangeTable'
import { Filters } from '@/components/ui/Filters'
import { Caution, Page, PageHead } from '@/components/ui/Page'
import { PrintButton } from '@/components/ui/PrintButton'
import { EmptyState } from '@/components/ui/States'
import { listAirChange } from '@/db/queries/air-change'
import { groupRows, isShown, scaleMax, sortRows, verdictCounts } from '@/lib/format/air-change'
import { counted } from '@/lib/format/counts'
import { withQuery } from '@/lib/format/query'
import { paths } from '@/lib/paths'
import { requirePage } from '@/lib/server/http/page'
import { airChangePageQuery, filterGroups, sortLink } from './query'

export const metadata: Metadata = { title: 'Air change' }

/** Every room of the building against its basis. */
export default async function AirChangePage({
  searchParams,
}: {
  searchParams: Promise<Record<string, string | string[] | undefined>>
}) {
  const page = await requirePage('air-change.read')
  const query = airChangePageQuery.parse(await searchParams)
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
  const rows = await page.read((tx) =>
    listAirChange(tx, { buildingId: building.id, mode: query.mode, weeks: Number(query.weeks) }),
  )
  const shown = sortRows(
    rows.filter((row) => isShown(row, query.show)),
    query.sort,
    query.order === 'down',
  )
  const dayWords = (night: string) => formatInTimeZone(`${night}T12:00:00Z`, 'UTC', 'd MMM')
  const measured = rows.filter(
    (row) => row.rate !== null || row.rateLow !== null || row.rateHigh !== null,
  ).length
  return (
    <Page>
      <PageHead
        title={`Air change, ${counted(rows.length, 'room')} against their basis`}
        lead={`${query.mode === 'supply on' ? 'Supply on' : query.mode}, the last 28 days since the last change, from ${counted(measured, 'room')} with a figure. ${verdictCounts(rows)}`}
        end={
          <span className="no-print">
            <a
              href={withQuery(
                paths.api.airChange(),
                { building: building.slug, ...query, format: 'csv' },
                {},
              )}
            >
              CSV of what is shown
            </a>{' '}
            <PrintButton />
          </span>
        }
      />
      <Filters groups={filterGroups(query, rows)} />
      {shown.length === 0 ? (
        <EmptyState level={2} title="No room fits this choice">
          Choose “all” beside Show. Rooms appear here after their first night with a decay; the decays that
          were refused say why on the page Decays.
        </EmptyState>
      ) : (
        <AirChangeTable
          groups={groupRows(shown, query.group)}
          max={scaleMax(shown)}
          sortOf={(sort) => sortLink(query, sort)}
          dayWords={dayWords}
        />
      )}
      <Caution>
        Each figure is an estimate from one sensor, with the interval that holds the true rate 95 times in
        100. Outdoor air dilutes what people give off; it says nothing of other pollutants or of filtration.
        Follow the local code and licensed practice before work is ordered or a room is released.
      </Caution>
    </Page>
  )
}

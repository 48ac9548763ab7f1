import type { Metadata } from 'next'
import Link from 'next/link'
import { Page, PageHead } from '@/components/ui/Page'
import { EmptyState } from '@/components/ui/States'
import { Table, Td, Th, Tr } from '@/components/ui/Table'
import { listDigests } from '@/db/queries/digests'
import { paths } from '@/lib/paths'
import { requirePage } from '@/lib/server/http/page'
import { digestContentSchema } from '@/lib/wire/digests'

export const metadata: Metadata = { title: 'Digests' }

/** Every weekly letter, newest first. */
export default async function DigestsPage() {
  const page = await requirePage('digest.read')
  const { building } = page
  const rows = building
    ? await page.read((tx) => listDigests(tx, { buildingId: building.id, limit: 120 }))
    : []
  const newest = rows[0] ? digestContentSchema.parse(rows[0].content) : null
  return (
    <Page>
      <PageHead
        title={newest ? 'The weekly letter' : 'No weekly letter yet'}
        lead="Once a week, in plain words: which rooms had enough outdoor air, what is being done, and how many people each room’s ventilation supports."
      />
      {rows.length === 0 ? (
        <EmptyState level={2} title="The first one comes on a Monday">
          It is written after the first whole week in which rooms were measured, and mailed to the people whom
          the building’s administrator entered.
        </EmptyState>
      ) : (
        <Table caption="Weekly letters">
          <thead>
            <tr>
              <Th>Week</Th>
              <Th>What it says</Th>
              <Th className="max-sm:hidden">Tenancy</Th>
            </tr>
          </thead>
          <tbody>
            {rows.map((row) => {
              const digest = digestContentSchema.parse(row.content)
              return (
                <Tr key={row.publicId}>
                  <Td className="whitespace-nowrap text-ink-2">{digest.weekWords}</Td>
                  <Td>
                    <Link href={paths.digest(row.publicId)}>{digest.title}</Link>
                  </Td>
                  <Td className="text-ink-2 max-sm:hidden">{row.tenancy}</Td>
                </Tr>
              )
            })}
          </tbody>
        </Table>
      )}
    </Page>
  )
}

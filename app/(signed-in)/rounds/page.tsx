import type { Metadata } from 'next'
import { NoBuilding } from '@/components/rooms/NoBuilding'
import { RoundsBoard } from '@/components/rooms/RoundsBoard'
import { Page } from '@/components/ui/Page'
import { boardFilterOf } from '@/lib/format/board-filter'
import { requirePage } from '@/lib/server/http/page'
import { boardFor } from '@/lib/server/live/visible'

export const metadata: Metadata = { title: 'Rounds' }

type Search = { searchParams: Promise<Record<string, string | string[] | undefined>> }

/** The live board of the building's rooms; who needs someone comes first. */
export default async function RoundsPage({ searchParams }: Search) {
  const page = await requirePage('rounds.read')
  const board = page.building && (await boardFor(page.scope, page.building.id))
  return (
    <Page>
      {board && board.rooms.length > 0 ? (
        <RoundsBoard key={board.building.slug} initial={board} filter={boardFilterOf(await searchParams)} />
      ) : (
        <NoBuilding building={board?.building.name ?? null} />
      )}
    </Page>
  )
}

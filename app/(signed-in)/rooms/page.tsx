import type { Metadata } from 'next'
import { NoBuilding } from '@/components/rooms/NoBuilding'
import { RoomList } from '@/components/rooms/RoomList'
import { Page } from '@/components/ui/Page'
import { requirePage } from '@/lib/server/http/page'
import { boardFor } from '@/lib/server/live/visible'

export const metadata: Metadata = { title: 'Rooms' }

/** Every room that the reader may see, by floor. */
export default async function RoomsPage() {
  const page = await requirePage('room.read')
  const board = page.building && (await boardFor(page.scope, page.building.id))
  return (
    <Page>
      {board && board.rooms.length > 0 ? (
        <RoomList key={board.building.slug} initial={board} tenantOnly={page.scope.tenancyId !== null} />
      ) : (
        <NoBuilding building={board?.building.name ?? null} />
      )}
    </Page>
  )
}

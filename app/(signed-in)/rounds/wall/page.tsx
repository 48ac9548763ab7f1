import type { Metadata } from 'next'
import { NoBuilding } from '@/components/rooms/NoBuilding'
import { WallBoard } from '@/components/rooms/WallBoard'
import { requirePage } from '@/lib/server/http/page'
import { boardFor } from '@/lib/server/live/visible'

export const metadata: Metadata = { title: 'Rounds, wall screen' }

/** Rounds for a screen on a wall. It hides the masthead, and shows nothing of one person's rooms. */
export default async function WallPage() {
  const page = await requirePage('rounds.read')
  const board = page.building && (await boardFor(page.scope, page.building.id, { wall: true }))
  return (
    <main id="main" data-wall className="px-10 pb-6 [zoom:1.2] max-sm:px-5 wall:[zoom:1.9]">
      {board && board.rooms.length > 0 ? (
        <WallBoard key={board.building.slug} initial={board} />
      ) : (
        <NoBuilding building={board?.building.name ?? null} />
      )}
    </main>
  )
}

import type { Metadata } from 'next'
import { notFound } from 'next/navigation'
import { Suspense } from 'react'
import { RoomView } from '@/components/rooms/RoomView'
import { Crumbs, Page } from '@/components/ui/Page'
import { rangeOf } from '@/lib/format/room-range'
import { paths } from '@/lib/paths'
import { can } from '@/lib/policy/permissions'
import { systemClock } from '@/lib/server/clock'
import { requirePage } from '@/lib/server/http/page'
import { boardFor } from '@/lib/server/live/visible'
import { roomDetail } from '@/lib/server/rooms/detail'
import { Courses, CoursesWaiting } from './courses'
import { loadRoom, neighboursOf } from './load'

type Address = {
  params: Promise<{ room: string }>
  searchParams: Promise<Record<string, string | string[] | undefined>>
}

export async function generateMetadata({ params }: Address): Promise<Metadata> {
  const found = await loadRoom((await params).room)
  return { title: found ? `${found.room.number} ${found.room.name}` : 'Room' }
}

/** One room: its number now, its verdict and basis, a day, a week or four, half a year of rates; what it can take in the margin. */
export default async function RoomPage({ params, searchParams }: Address) {
  const page = await requirePage('room.read')
  const found = await loadRoom((await params).room)
  if (!found) notFound()
  const board = await boardFor(page.scope, found.buildingId)
  if (!board?.rooms.some(({ id }) => id === found.room.id)) notFound()
  const now = systemClock.now()
  const detail = await roomDetail(page, found, now)
  const { roles } = page.membership
  const walks = can(roles, 'rounds.read')
  const rates = walks || can(roles, 'air-change.read')
  const range = rangeOf((await searchParams).range)
  const nowS = now.getTime() / 1000
  return (
    <Page>
      <Crumbs
        crumbs={[
          walks ? { word: 'Rounds', href: paths.rounds() } : { word: 'Rooms', href: paths.rooms() },
          { word: found.room.floor },
          { word: `${found.room.number} ${found.room.name}` },
        ]}
        end={neighboursOf(board, found.room.id)}
      />
      <RoomView
        board={board}
        detail={detail}
        timeZone={found.timeZone}
        nowS={nowS}
        rates={rates}
        decaysHref={can(roles, 'decay.read') ? paths.decaysOf(found.room.id) : null}
        linksSensors={can(roles, 'sensor.read')}
      >
        <Suspense key={range.key} fallback={<CoursesWaiting />}>
          <Courses ctx={page} found={found} board={board} range={range} rates={rates} nowS={nowS} />
        </Suspense>
      </RoomView>
    </Page>
  )
}

import type { Metadata } from 'next'
import { notFound } from 'next/navigation'
import { Suspense } from 'react'
import { RateHistory } from '@/components/rooms/RateHistory'
import { RoomCautions, RoomFindings, RoomSensors } from '@/components/rooms/RoomAsides'
import { RoomHead } from '@/components/rooms/RoomHead'
import { RoomTakes } from '@/components/rooms/RoomTakes'
import { RoomVerdict } from '@/components/rooms/RoomVerdict'
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
  const tile = board?.rooms.find(({ id }) => id === found.room.id)
  if (!board || !tile) notFound()
  const now = systemClock.now()
  const detail = await roomDetail(page, found, now)
  const { roles } = page.membership
  const rates = can(roles, 'air-change.read') || can(roles, 'rounds.read')
  const { verdict } = detail
  const basisRate = verdict?.basisFlowLps ? (verdict.basisFlowLps * 3.6) / verdict.volumeM3 : null
  const walks = can(roles, 'rounds.read')
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
      <div className="grid grid-cols-[minmax(0,1fr)_304px] gap-x-16 max-lg:flex max-lg:flex-col">
        <div className="min-w-0 max-lg:contents">
          <RoomHead board={board} room={found.room}>
            <RoomVerdict
              detail={detail}
              rates={rates}
              decaysHref={can(roles, 'decay.read') ? paths.decaysOf(found.room.id) : null}
            />
          </RoomHead>
          {!tile.hidden && (
            <Suspense fallback={<CoursesWaiting />}>
              <Courses
                ctx={page}
                found={found}
                board={board}
                range={rangeOf((await searchParams).range)}
                rates={rates}
                nowS={now.getTime() / 1000}
              />
            </Suspense>
          )}
          {rates && (
            <RateHistory
              weeks={detail.weeks}
              changes={detail.changes}
              basisRatePerHour={basisRate}
              timeZone={found.timeZone}
              roomName={found.room.name}
            />
          )}
        </div>
        <aside className="pt-[18px] max-lg:contents">
          <RoomTakes detail={detail} tile={tile} rates={rates} />
          {!tile.hidden && (
            <RoomSensors
              sensors={detail.sensors}
              nowS={now.getTime() / 1000}
              timeZone={found.timeZone}
              linked={can(roles, 'sensor.read')}
            />
          )}
          <RoomFindings findings={detail.findings} year={now.toISOString().slice(0, 4)} />
        </aside>
      </div>
      <RoomCautions />
    </Page>
  )
}

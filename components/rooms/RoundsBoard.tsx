'use client'

import Link from 'next/link'
import { useEffect, useState } from 'react'
import { useBoard } from '@/components/live/use-board'
import { useNow } from '@/components/live/use-now'
import { Filters } from '@/components/ui/Filters'
import { LevelGlass } from '@/components/ui/LevelGlass'
import { EmptyState } from '@/components/ui/States'
import { isShown, needSomeone, type Show } from '@/lib/format/board'
import { type BoardFilter, boardAddress, boardFilters, hasTenancy, isClose } from '@/lib/format/board-filter'
import { paths } from '@/lib/paths'
import type { Board } from '@/lib/wire/live-board'
import { BoardFloors } from './BoardFloors'
import { BoardHead } from './BoardHead'
import { BoardKey } from './BoardKey'
import { NeedsSomeone } from './NeedsSomeone'

/** How many rooms the strip holds at most; the others stay in their places, and the headline counts them all. */
const MOST_ABOVE = 12
/** After this long without a stream the head says so; a reconnect is quicker. */
const PATIENCE_MS = 5000

/** True once the stream has been away for longer than a reconnect takes. */
function useMissesStream(state: 'open' | 'waiting'): boolean {
  const [misses, setMisses] = useState(false)
  useEffect(() => {
    if (state === 'open') setMisses(false)
    const timer = state === 'waiting' ? setTimeout(() => setMisses(true), PATIENCE_MS) : undefined
    return () => clearTimeout(timer)
  }, [state])
  return misses
}

/** Rounds: who needs someone, then every room on its floor, as readings arrive. */
export function RoundsBoard({ initial, filter }: { initial: Board; filter: BoardFilter }) {
  const { board, state } = useBoard(initial)
  const nowS = useNow(initial.atS)
  const misses = useMissesStream(state)
  const walked = board.rooms.filter(
    (room) => hasTenancy(room, filter.tenancy) && (filter.floor === null || room.floorId === filter.floor),
  )
  const needing = needSomeone(walked)
  const strip = needing.slice(0, MOST_ABOVE)
  const above = new Set(strip.map(({ id }) => id))
  const rooms = walked.filter((room) => isShown(room, filter.show))
  const close = isClose(filter, board.rooms.length)
  return (
    <>
      <BoardHead
        board={board}
        rooms={walked}
        needing={needing.length}
        nowS={nowS}
        state={state}
        live={misses}
      />
      {strip.length > 0 && (
        <NeedsSomeone rooms={strip} board={board} nowS={nowS} brief={strip.length > 4} linked />
      )}
      <Filters
        label="Which rooms"
        groups={boardFilters(board, walked, filter)}
        end={
          <span className="flex gap-[14px]">
            <Link
              href={boardAddress({ ...filter, tiles: close ? 'full' : 'close' })}
              scroll={false}
              className="plain-link text-ink-2 max-sm:py-[11px]"
            >
              {close ? 'Full tiles' : 'Close tiles'}
            </Link>
            <Link href={paths.wall()} className="plain-link text-ink-2 max-sm:py-[11px]">
              Wall screen
            </Link>
          </span>
        }
      />
      {rooms.length === 0 ? (
        <NothingShown show={filter.show} />
      ) : (
        <BoardFloors board={board} rooms={rooms} above={above} nowS={nowS} close={close} linked />
      )}
      <BoardKey />
    </>
  )
}

function NothingShown({ show }: { show: Show }) {
  const words: Record<Show, string> = {
    every: 'No room is in this choice of floor and tenancy.',
    'near-or-over': 'No room of this choice is near its limit or over it.',
    falling: 'No room of this choice is falling after people left.',
    trouble: 'Every sensor of this choice is heard and sound.',
  }
  return (
    <div className="mt-8">
      <EmptyState
        level={2}
        title="No room to show"
        drawing={
          <LevelGlass
            state="falling"
            level={0.02}
            ebbMarks={[1, 0.62, 0.38, 0.23, 0.14, 0.08]}
            widthPx={36}
            heightPx={136}
            lipPx={7}
          />
        }
        actions={<Link href={paths.rounds()}>Show every room</Link>}
      >
        <p>{words[show]}</p>
      </EmptyState>
    </div>
  )
}

'use client'

import { useBoard } from '@/components/live/use-board'
import { useNow } from '@/components/live/use-now'
import { needSomeone } from '@/lib/format/board'
import { CLOSE_FROM } from '@/lib/format/board-filter'
import type { Board } from '@/lib/wire/live-board'
import { BoardFloors } from './BoardFloors'
import { BoardHead } from './BoardHead'
import { BoardKey } from './BoardKey'
import { NeedsSomeone } from './NeedsSomeone'

/** How many rooms that need someone a wall has room for; the headline counts them all. */
const MOST_ABOVE = 6

/** Rounds for a screen on a wall: nothing to press, big type, one person's rooms left out, and it comes back by itself. */
export function WallBoard({ initial }: { initial: Board }) {
  const { board, state } = useBoard(initial, { wall: true })
  const nowS = useNow(initial.atS)
  const rooms = board.rooms.filter(({ hidden }) => !hidden)
  const needing = needSomeone(rooms)
  const strip = needing.slice(0, MOST_ABOVE)
  return (
    <>
      <p className="pt-3 text-2 text-ink-2">{board.building.name}</p>
      <BoardHead board={board} rooms={rooms} needing={needing.length} nowS={nowS} state={state} live />
      {strip.length > 0 && (
        <NeedsSomeone rooms={strip} board={board} nowS={nowS} brief={strip.length > 4} linked={false} />
      )}
      <BoardFloors
        board={board}
        rooms={rooms}
        above={new Set(strip.map(({ id }) => id))}
        nowS={nowS}
        close={rooms.length >= CLOSE_FROM}
        linked={false}
      />
      <BoardKey />
    </>
  )
}

import type { LiveState } from '@/components/live/stream'
import { PageHead } from '@/components/ui/Page'
import { boardLead, boardTitle, lastReadingWords, limitWords } from '@/lib/format/board'
import { zonedStamp } from '@/lib/format/clock'
import { spaced } from '@/lib/format/counts'
import type { Board, RoomTile } from '@/lib/wire/live-board'

type Props = {
  board: Board
  rooms: readonly RoomTile[]
  needing: number
  nowS: number
  state: LiveState
  live: boolean
}

/** The finding as title, outdoor level and limit at the end, and how old what is shown is. */
export function BoardHead({ board, rooms, needing, nowS, state, live }: Props) {
  const { timeZone } = board.building
  return (
    <PageHead
      live
      title={boardTitle(needing)}
      lead={boardLead(rooms)}
      end={
        <>
          <span className="fig">{spaced(board.outdoor.ppm)}</span> ppm outdoors
          {board.outdoor.measured ? '' : ' (assumed)'} · {limitWords(rooms)}
          <br />
          <span className="text-ink-3">
            {state === 'waiting' && live
              ? `No live connection; as of ${zonedStamp(board.atS, timeZone).clock}, trying again`
              : lastReadingWords(board.lastReadingS, nowS, timeZone)}
          </span>
        </>
      }
    />
  )
}

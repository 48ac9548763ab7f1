import { RoomCourse } from '@/components/rooms/RoomCourse'
import { Skeleton, Waiting } from '@/components/ui/States'
import type { RoomIdentity } from '@/db/queries/rooms'
import { RANGES, type Range } from '@/lib/format/room-range'
import { paths } from '@/lib/paths'
import type { SignedContext } from '@/lib/server/http/signed'
import { roomRecord } from '@/lib/server/rooms/record'
import type { Board } from '@/lib/wire/live-board'

/** About as many points as a wide plot has pixels; the day's strip needs fewer. */
const POINTS = 900
const DAY_POINTS = 600
const DAY_S = 86_400

type Props = {
  ctx: SignedContext
  found: RoomIdentity
  board: Board
  range: Range
  rates: boolean
  nowS: number
}

/** The room's day and its chosen span, read on the server. */
export async function Courses({ ctx, found, board, range, rates, nowS }: Props) {
  const toS = Math.ceil(nowS)
  const [day, span] = await Promise.all([
    roomRecord(ctx, found, { fromS: toS - DAY_S, toS, points: DAY_POINTS }),
    roomRecord(ctx, found, { fromS: toS - range.seconds, toS, points: POINTS }),
  ])
  const ranges = RANGES.map(({ key, word }) => ({
    word,
    href: `${paths.room(found.room.id)}?range=${key}`,
    current: key === range.key,
  }))
  const { id, name } = found.room
  return (
    <RoomCourse
      board={board}
      roomId={id}
      roomName={name}
      day={day}
      span={span}
      ranges={ranges}
      rates={rates}
    />
  )
}

/** Holds the place of both figures while they are read. */
export function CoursesWaiting() {
  return (
    <Waiting words="Reading the room’s record">
      <Skeleton height={20} width={220} />
      <Skeleton height={112} className="mt-3" />
      <Skeleton height={20} width={160} className="mt-12" />
      <Skeleton height={330} className="mt-3" />
    </Waiting>
  )
}

import { cache } from 'react'
import { getRoom } from '@/db/queries/rooms'
import { paths } from '@/lib/paths'
import { pageContext } from '@/lib/server/http/page'
import type { Board } from '@/lib/wire/live-board'

/** The room of the address in the reader's scope; read once a request, for title and page. */
export const loadRoom = cache(async (publicId: string) => {
  const page = await pageContext()
  return page ? page.read((tx) => getRoom(tx, { publicId })) : undefined
})

/** The rooms before and after this one in walking order. */
export function neighboursOf(board: Board, roomId: string) {
  const at = board.rooms.findIndex(({ id }) => id === roomId)
  return [board.rooms[at - 1], board.rooms[at + 1]].flatMap((room) =>
    room ? [{ word: `${room.number} ${room.name}`, href: paths.room(room.id) }] : [],
  )
}

import { listVisibleRooms } from '@/db/queries/board'
import { type Scope, wallScopeOf } from '@/lib/policy/scope'
import type { Board, BoardChange, RoomTile } from '@/lib/wire/live-board'
import { systemClock } from '../clock'
import { database } from '../database'
import { liveHub } from './hub'

/** Which rooms a reader sees, and of which the live value, as row-level security answered for their scope. */
export type Visible = ReadonlyMap<string, { live: boolean }>

/** Asks, in the reader's own scope, which rooms of the building are theirs to see. */
export function visibleFor(scope: Scope, buildingId: number): Promise<Visible> {
  const { hidesSinglePerson } = scope
  return database().withScope(scope, (tx) =>
    listVisibleRooms(tx, { buildingId, hidesSinglePerson, now: systemClock.now() }),
  )
}

/** What of these rooms the reader may see; a hidden live value goes out as nothing. */
export function visibleRooms(rooms: readonly RoomTile[], visible: Visible): RoomTile[] {
  return rooms.flatMap((room) => {
    const may = visible.get(room.id)
    if (!may) return []
    return [may.live ? room : { ...room, live: null, hidden: true, suspectReason: null }]
  })
}

/** A change as the reader may see it; null when nothing of it is theirs. */
export function visibleChange(change: BoardChange, visible: Visible): BoardChange | null {
  const rooms = visibleRooms(change.rooms, visible)
  return rooms.length === 0 ? null : { ...change, rooms }
}

/**
 * The board of a building as the owner of this scope may see it; undefined where the building is not in scope. On a `wall`, where
 * anyone may look, single-person rooms show no live value whoever signed in.
 */
export async function boardFor(
  scope: Scope,
  buildingId: number,
  options: { wall?: boolean } = {},
): Promise<Board | undefined> {
  const reader = options.wall ? wallScopeOf(scope) : scope
  const [board, visible] = await Promise.all([liveHub().board(buildingId), visibleFor(reader, buildingId)])
  if (!board) return undefined
  const rooms = visibleRooms(board.rooms, visible)
  const own = rooms.flatMap(({ live }) => (live?.atS ? [live.atS] : []))
  return {
    ...board,
    rooms,
    floors: board.floors.filter((floor) => rooms.some(({ floorId }) => floorId === floor.id)),
    lastReadingS: own.length > 0 ? Math.max(...own) : null,
  }
}

/** The live board of one building: what /api/v1/rooms gives, and what /api/v1/live sends of it as it changes. Instants are epoch seconds. */
import { z } from 'zod'
import { ROOM_STATES } from '@/lib/air/room-state'

const nullableNumber = z.number().nullable()

export const roomLiveSchema = z.object({
  state: z.enum(ROOM_STATES),
  co2Ppm: nullableNumber,
  atS: nullableNumber,
  level: nullableNumber,
  trend: z.enum(['rising', 'steady', 'falling']).nullable(),
  slopePpmPerMin: nullableNumber,
  overSinceS: nullableNumber,
  overTodayMin: z.number(),
  limitInMin: nullableNumber,
  emptySinceS: nullableNumber,
  ebbMarks: z.array(z.number()),
  unusual: z.boolean(),
})

export const VERDICTS = ['meets basis', 'short of basis', 'not proven'] as const

export const roomTileSchema = z.object({
  /** public id */
  id: z.string(),
  number: z.string(),
  name: z.string(),
  use: z.string(),
  floorId: z.number(),
  tenancy: z.string().nullable(),
  singlePerson: z.boolean(),
  outdoorPpm: z.number(),
  limitPpm: z.number(),
  /** null where the live value is not for this reader, or the room has no sensor */
  live: roomLiveSchema.nullable(),
  /** the room has a sensor whose live value this reader may not see */
  hidden: z.boolean(),
  suspectReason: z.string().nullable(),
  verdict: z.enum(VERDICTS).nullable(),
  supportsPersons: nullableNumber,
  designHeadcount: nullableNumber,
})
export type RoomTile = z.infer<typeof roomTileSchema>

export const boardFloorSchema = z.object({
  id: z.number(),
  name: z.string(),
  ordinal: z.number(),
  /** what the supply of the floor's air handlers agrees on, since when, and how that is known */
  supply: z
    .object({
      state: z.enum(['on', 'reduced', 'off']),
      sinceS: z.number(),
      origin: z.enum(['status', 'schedule']),
    })
    .nullable(),
})
export type BoardFloor = z.infer<typeof boardFloorSchema>

export const boardSchema = z.object({
  building: z.object({ slug: z.string(), name: z.string(), timeZone: z.string() }),
  atS: z.number(),
  outdoor: z.object({ ppm: z.number(), measured: z.boolean() }),
  lastReadingS: nullableNumber,
  floors: z.array(boardFloorSchema),
  rooms: z.array(roomTileSchema),
})
export type Board = z.infer<typeof boardSchema>

/** What has changed on a board since the last event. */
export const boardChangeSchema = boardSchema.pick({ atS: true, outdoor: true, lastReadingS: true }).extend({
  rooms: z.array(roomTileSchema),
})
export type BoardChange = z.infer<typeof boardChangeSchema>

/** Names of the server-sent events. `reload`: read the snapshot again; `notice`: something of this kind changed; `ended`: sign in again. */
export const LIVE_EVENTS = ['rooms', 'reload', 'notice', 'ended'] as const
export type LiveEventName = (typeof LIVE_EVENTS)[number]

export const noticeEventSchema = z.object({ kind: z.string() })

/** The board with a change laid over it; rooms keep their order, and a room that the board does not hold is not added. */
export function applyChange(board: Board, change: BoardChange): Board {
  const changed = new Map(change.rooms.map((room) => [room.id, room]))
  return {
    ...board,
    atS: change.atS,
    outdoor: change.outdoor,
    lastReadingS: change.lastReadingS,
    rooms: board.rooms.map((room) => changed.get(room.id) ?? room),
  }
}

import { z } from 'zod'
import { systemClock } from '@/lib/server/clock'
import { requireRoom } from '@/lib/server/http/room'
import { route } from '@/lib/server/http/route'
import { roomDetail } from '@/lib/server/rooms/detail'

/** GET /api/v1/rooms/[room]: the room, its verdict, weeks, changes, findings and sensors; for a tenant without the air-change parts. */
export const GET = route({
  permission: 'room.read',
  params: z.object({ room: z.string().max(64) }),
  handler: async ({ ctx, params }) => {
    const found = await requireRoom(ctx, params.room)
    return roomDetail(ctx, found, systemClock.now())
  },
})

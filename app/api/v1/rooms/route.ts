import { z } from 'zod'
import { Refusal } from '@/lib/errors'
import { requireBuilding } from '@/lib/server/http/building'
import { route } from '@/lib/server/http/route'
import { boardFor } from '@/lib/server/live/visible'

const query = z.object({ building: z.string().optional(), wall: z.enum(['0', '1']).default('0') })

/** GET /api/v1/rooms: the live board of a building, as the caller may see it. */
export const GET = route({
  permission: 'room.read',
  query,
  handler: async ({ ctx, query: asked }) => {
    const building = await requireBuilding(ctx, asked.building)
    const board = await boardFor(ctx.scope, building.id, { wall: asked.wall === '1' })
    if (!board) throw new Refusal('not-found', 'There is no such building here, or it is not yours to see.')
    return board
  },
})

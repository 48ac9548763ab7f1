import { z } from 'zod'
import { requireBuilding } from '@/lib/server/http/building'
import { route } from '@/lib/server/http/route'
import { liveResponse } from '@/lib/server/live/event-stream'

export const dynamic = 'force-dynamic'

const query = z.object({ building: z.string().optional(), wall: z.enum(['0', '1']).default('0') })

/** GET /api/v1/live: server-sent events of a building: rooms as they change, notices, reload, and the end of the session. */
export const GET = route({
  permission: 'api.live',
  query,
  handler: async ({ ctx, query: asked, request }) => {
    const building = await requireBuilding(ctx, asked.building)
    return liveResponse({
      signed: ctx,
      buildingId: building.id,
      wall: asked.wall === '1',
      signal: request.signal,
    })
  },
})

import { z } from 'zod'
import { getFirstReading } from '@/db/queries/sensors'
import { Refusal } from '@/lib/errors'
import { route } from '@/lib/server/http/route'

/** GET /api/v1/sensors/{id}/first-reading: what has been heard from a sensor since it was registered. */
export const GET = route({
  permission: 'sensor.read',
  params: z.object({ sensor: z.string() }),
  handler: async ({ ctx, params }) => {
    const heard = await ctx.read((tx) => getFirstReading(tx, { deviceId: decodeURIComponent(params.sensor) }))
    if (!heard) throw new Refusal('not-found', 'There is no such sensor here, or it is not yours to see.')
    return heard
  },
})

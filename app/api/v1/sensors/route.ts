import { listSensors } from '@/db/queries/sensors'
import { systemClock } from '@/lib/server/clock'
import { requireBuilding } from '@/lib/server/http/building'
import { route } from '@/lib/server/http/route'
import { sensorListQuerySchema } from '@/lib/wire/sensors'

/** GET /api/v1/sensors: the sensors of a building with place, standing and last reading. */
export const GET = route({
  permission: 'sensor.read',
  query: sensorListQuerySchema,
  handler: async ({ ctx, query }) => {
    const building = await requireBuilding(ctx, query.building)
    const rows = await ctx.read((tx) => listSensors(tx, { buildingId: building.id, now: systemClock.now() }))
    return {
      building: building.slug,
      sensors: rows.filter((row) => query.standing === 'all' || row.standing === query.standing),
    }
  },
})

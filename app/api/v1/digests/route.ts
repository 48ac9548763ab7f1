import { z } from 'zod'
import { listDigests } from '@/db/queries/digests'
import { requireBuilding } from '@/lib/server/http/building'
import { route } from '@/lib/server/http/route'

/** GET /api/v1/digests: the weekly letters in scope, newest first. */
export const GET = route({
  permission: 'digest.read',
  query: z.object({
    building: z.string().optional(),
    limit: z.coerce.number().int().min(1).max(200).default(20),
  }),
  handler: async ({ ctx, query }) => {
    const building = await requireBuilding(ctx, query.building)
    const rows = await ctx.read((tx) => listDigests(tx, { buildingId: building.id, limit: query.limit }))
    return {
      building: building.slug,
      digests: rows.map(({ publicId, weekStart, tenancy, content }) => ({
        id: publicId,
        weekStart,
        tenancy,
        content,
      })),
    }
  },
})

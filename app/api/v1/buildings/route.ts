import { listBuildingsInScope } from '@/db/queries/people'
import { route } from '@/lib/server/http/route'

/** GET /api/v1/buildings: the buildings in scope, by name. */
export const GET = route({
  permission: 'room.read',
  handler: async ({ ctx }) => {
    const buildings = await ctx.read(listBuildingsInScope)
    return { buildings: buildings.map(({ slug, name, timeZone }) => ({ slug, name, timeZone })) }
  },
})

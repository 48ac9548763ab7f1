import { listDecays } from '@/db/queries/decays'
import { systemClock } from '@/lib/server/clock'
import { requireBuilding } from '@/lib/server/http/building'
import { route } from '@/lib/server/http/route'
import { addDays, localDate } from '@/lib/time'
import { decayListQuerySchema } from '@/lib/wire/decays'

const pageSize = 200

/** GET /api/v1/decays: decays in force, newest first; page on with `before`, the start of the last one. */
export const GET = route({
  permission: 'decay.read',
  query: decayListQuerySchema,
  handler: async ({ ctx, query }) => {
    const building = await requireBuilding(ctx, query.building)
    const sinceNight = addDays(
      localDate(systemClock.now().getTime() / 1000, building.timeZone),
      -7 * query.weeks,
    )
    const decays = await ctx.read((tx) =>
      listDecays(tx, {
        buildingId: building.id,
        show: query.show,
        roomPublicId: query.room,
        mode: query.mode,
        sinceNight,
        beforeS: query.before,
        limit: pageSize,
      }),
    )
    return {
      building: building.slug,
      decays,
      before: decays.length === pageSize ? Math.floor(decays.at(-1)?.startS ?? 0) : null,
    }
  },
})

import { z } from 'zod'
import { listAirChange } from '@/db/queries/air-change'
import { airChangeCsv, isShown, SHOWN, SORTS, sortRows } from '@/lib/format/air-change'
import { requireBuilding } from '@/lib/server/http/building'
import { route } from '@/lib/server/http/route'
import { airChangeQuerySchema } from '@/lib/wire/air-change'

const query = airChangeQuerySchema.extend({
  show: z.enum(SHOWN).default('all'),
  sort: z.enum(SORTS).default('against basis'),
  order: z.enum(['up', 'down']).default('up'),
  format: z.enum(['json', 'csv']).default('json'),
})

/** GET /api/v1/air-change: every room of a building in one mode, with weekly rates; `format=csv` for a spreadsheet. */
export const GET = route({
  permission: 'air-change.read',
  query,
  handler: async ({ ctx, query: asked }) => {
    const building = await requireBuilding(ctx, asked.building)
    const rows = await ctx.read((tx) =>
      listAirChange(tx, { buildingId: building.id, mode: asked.mode, weeks: asked.weeks }),
    )
    const shown = sortRows(
      rows.filter((row) => isShown(row, asked.show)),
      asked.sort,
      asked.order === 'down',
    )
    if (asked.format === 'json') return { building: building.slug, mode: asked.mode, rooms: shown }
    return new Response(airChangeCsv(shown), {
      headers: {
        'Content-Type': 'text/csv; charset=utf-8',
        'Content-Disposition': `attachment; filename="air-change-${building.slug}.csv"`,
      },
    })
  },
})

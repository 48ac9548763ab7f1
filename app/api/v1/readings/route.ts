import { listRawReadings, listReadingMeans, readRoomSeries } from '@/db/queries/readings'
import { Refusal } from '@/lib/errors'
import { readingsCsv } from '@/lib/format/readings-csv'
import { requireRoom } from '@/lib/server/http/room'
import { route } from '@/lib/server/http/route'
import { RESOLUTION_FACTS, readingsQuerySchema } from './schema'

const MOST_ROWS = 100_000

/** GET /api/v1/readings: CO2 of a room's lead sensor: raw, as means of stretches, or as a line of at most `points` points. */
export const GET = route({
  permission: 'room.read',
  query: readingsQuerySchema,
  handler: async ({ ctx, query }) => {
    const found = await requireRoom(ctx, query.room)
    if (found.room.singlePerson && ctx.scope.hidesSinglePerson) {
      throw new Refusal('not-allowed', 'This is one person’s room: only its weekly figures are shown.')
    }
    const span = { roomId: found.id, fromS: query.from, toS: query.to }
    const { points } = query
    if (points !== undefined) {
      return ctx.read((tx) => readRoomSeries(tx, { ...span, buildingId: found.buildingId, points }))
    }
    const { stretch } = RESOLUTION_FACTS[query.resolution]
    const readings = await ctx.read<readonly object[]>((tx) =>
      query.resolution === 'raw'
        ? listRawReadings(tx, { ...span, limit: MOST_ROWS })
        : listReadingMeans(tx, { ...span, stretch, timeZone: found.timeZone }),
    )
    if (query.format === 'json') return { room: found.room.id, resolution: query.resolution, readings }
    return new Response(readingsCsv(readings), {
      headers: {
        'Content-Type': 'text/csv; charset=utf-8',
        'Content-Disposition': `attachment; filename="co2-${found.room.number}.csv"`,
      },
    })
  },
})

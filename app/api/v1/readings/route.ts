import { listRawReadings, listReadingMeans, readRoomSeries } from '@/db/queries/readings'
import { Refusal } from '@/lib/errors'
import { readingsCsv } from '@/lib/format/readings-csv'
import { database } from '@/lib/server/database'
import { storeGatewayRequest } from '@/lib/server/gateway/store'
import { keyRoute } from '@/lib/server/http/key-route'
import { requireRoom } from '@/lib/server/http/room'
import { route } from '@/lib/server/http/route'
import { gatewayBodySchema } from '@/lib/wire/gateway'
import { idempotencyKeyOf, RESOLUTION_FACTS, readingsQuerySchema } from './schema'

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
    const { resolutionS } = RESOLUTION_FACTS[query.resolution]
    const readings = await ctx.read<readonly object[]>((tx) =>
      resolutionS === null
        ? listRawReadings(tx, { ...span, limit: MOST_ROWS })
        : listReadingMeans(tx, {
            ...span,
            buildingId: found.buildingId,
            resolutionS,
            timeZone: found.timeZone,
          }),
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

/** POST /api/v1/readings: readings of registered sensors from a gateway with an API key; each item is answered by itself. */
export const POST = keyRoute({
  keyScope: 'readings.write',
  body: gatewayBodySchema,
  handler: async ({ request, key, body, text, now }) => {
    const idempotencyKey = idempotencyKeyOf(request.headers.get('idempotency-key'))
    const { answer, isRepeat } = await storeGatewayRequest(database(), {
      key,
      idempotencyKey,
      text,
      items: body,
      now,
    })
    return Response.json(answer, {
      headers: { 'Cache-Control': 'no-store', ...(isRepeat ? { 'Idempotency-Replayed': 'true' } : {}) },
    })
  },
})

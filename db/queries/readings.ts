import { sql } from 'drizzle-orm'
import type { ChartPoint, RoomSeries } from '@/lib/wire/rooms'
import type { Tx } from '../client'

type Bucket = { n: number; lo: number; hi: number; lo_at: number; hi_at: number }

/** Lowest and highest reading of each stretch in the order in which they came; a stretch of one reading gives one point. */
function pointsOf(buckets: readonly Bucket[]): ChartPoint[] {
  return buckets.flatMap(({ n, lo, hi, lo_at, hi_at }): ChartPoint[] => {
    if (n === 1 || lo_at === hi_at) return [[lo_at, lo]]
    return lo_at < hi_at
      ? [
          [lo_at, lo],
          [hi_at, hi],
        ]
      : [
          [hi_at, hi],
          [lo_at, lo],
        ]
  })
}

type Span = { fromS: number; toS: number }

/** Readings with the offset of the fresh-air check that holds for each; the raw reading stays. Use as `FROM ${correctedReadings}`. */
const correctedReadings = sql.raw(`(visible_readings v LEFT JOIN (
    SELECT sensor_id AS offset_sensor_id, offset_ppm, from_at, lead(from_at) OVER (PARTITION BY sensor_id ORDER BY from_at) AS until
    FROM sensor_offsets) o
  ON o.offset_sensor_id = v.sensor_id AND v.at >= o.from_at AND (o.until IS NULL OR v.at < o.until))`)
const corrected = sql.raw('(v.co2_ppm + coalesce(o.offset_ppm, 0))::double precision')

/**
 * CO2 of a room's lead sensor between two instants in at most `points` points: the time is cut into half as many stretches, and of
 * each the lowest and the highest reading stay, so that no peak is lost. Outdoor air is the mean of each of up to 200 stretches.
 */
export async function readRoomSeries(
  tx: Tx,
  { roomId, buildingId, fromS, toS, points }: Span & { roomId: number; buildingId: number; points: number },
): Promise<RoomSeries> {
  const stretches = Math.max(1, Math.floor(points / 2))
  const { rows } = await tx.execute<Bucket>(sql`
    WITH r AS MATERIALIZED (
      SELECT extract(epoch from v.at)::double precision AS t, ${corrected} AS c
      FROM ${correctedReadings}
      WHERE v.room_id = ${roomId} AND v.lead AND v.at >= to_timestamp(${fromS}) AND v.at < to_timestamp(${toS}))
    SELECT count(*)::int AS n, min(c) AS lo, max(c) AS hi,
      (array_agg(t ORDER BY c, t))[1] AS lo_at, (array_agg(t ORDER BY c DESC, t))[1] AS hi_at
    FROM r GROUP BY width_bucket(t, ${fromS}, ${toS}, ${stretches}) ORDER BY min(t)`)
  const interval = await leadInterval(tx, roomId)
  return {
    fromS,
    toS,
    points: pointsOf(rows),
    outdoor: await readOutdoorMeans(tx, { buildingId, fromS, toS, stretches: Math.min(200, stretches) }),
    gapS: Math.max(5 * interval, (2.5 * (toS - fromS)) / stretches),
  }
}

async function leadInterval(tx: Tx, roomId: number): Promise<number> {
  const { rows } = await tx.execute<{ s: number }>(sql`
    SELECT s.interval_s AS s FROM placements p JOIN sensors s ON s.id = p.sensor_id
    WHERE p.room_id = ${roomId} AND p.lead ORDER BY p.from_at DESC LIMIT 1`)
  return rows[0]?.s ?? 60
}

/** Means of the building's outdoor sensors. */
async function readOutdoorMeans(
  tx: Tx,
  { buildingId, fromS, toS, stretches }: Span & { buildingId: number; stretches: number },
): Promise<ChartPoint[]> {
  const { rows } = await tx.execute<{ t: number; c: number }>(sql`
    SELECT avg(extract(epoch from v.at))::double precision AS t, avg(${corrected}) AS c
    FROM ${correctedReadings}
    WHERE v.building_id = ${buildingId} AND v.position = 'outdoor' AND v.at >= to_timestamp(${fromS}) AND v.at < to_timestamp(${toS})
    GROUP BY width_bucket(extract(epoch from v.at)::double precision, ${fromS}, ${toS}, ${stretches}) ORDER BY 1`)
  return rows.map(({ t, c }): ChartPoint => [t, c])
}

export type ReadingRow = { atS: number; co2Ppm: number; tempC: number | null; rhPct: number | null }
export type ReadingMean = {
  atS: number
  meanPpm: number
  lowestPpm: number
  highestPpm: number
  readings: number
}

/** Raw readings of a room's lead sensor, oldest first, at most `limit`. */
export async function listRawReadings(
  tx: Tx,
  { roomId, fromS, toS, limit }: Span & { roomId: number; limit: number },
): Promise<ReadingRow[]> {
  const { rows } = await tx.execute<ReadingRow>(sql`
    SELECT extract(epoch from v.at)::double precision AS "atS", v.co2_ppm::double precision AS "co2Ppm",
      v.temp_c::double precision AS "tempC", v.rh_pct::double precision AS "rhPct"
    FROM visible_readings v
    WHERE v.room_id = ${roomId} AND v.lead AND v.at >= to_timestamp(${fromS}) AND v.at < to_timestamp(${toS})
    ORDER BY v.at LIMIT ${limit}`)
  return rows
}

/** Means of stretches of `stretch` (an interval such as 15 minutes) in UTC, or of local days. */
export async function listReadingMeans(
  tx: Tx,
  { roomId, fromS, toS, stretch, timeZone }: Span & { roomId: number; stretch: string; timeZone: string },
): Promise<ReadingMean[]> {
  const start =
    stretch === '1 day'
      ? sql`date_trunc('day', v.at, ${timeZone})`
      : sql`date_bin(${stretch}::interval, v.at, timestamptz '2000-01-01 00:00:00Z')`
  const { rows } = await tx.execute<ReadingMean>(sql`
    SELECT extract(epoch from b)::double precision AS "atS", avg(c)::double precision AS "meanPpm", min(c)::double precision AS "lowestPpm",
      max(c)::double precision AS "highestPpm", count(*)::int AS readings
    FROM (SELECT ${start} AS b, v.co2_ppm AS c FROM visible_readings v
      WHERE v.room_id = ${roomId} AND v.lead AND v.at >= to_timestamp(${fromS}) AND v.at < to_timestamp(${toS})) AS r
    GROUP BY b ORDER BY b`)
  return rows
}

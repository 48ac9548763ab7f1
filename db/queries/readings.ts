import { sql } from 'drizzle-orm'
import type { ChartPoint, RoomSeries } from '@/lib/wire/rooms'
import type { Tx } from '../client'
import { FINEST_ROLLUP_S, type RollupResolution, rollupState, sourceOf, wholeStretches } from './rollups'

type Bucket = { n: number; lo: number; hi: number; lo_at: number; hi_at: number }

/** Lowest and highest reading of each stretch in the order in which they came; a stretch of one value gives one point. */
function pointsOf(buckets: readonly Bucket[]): ChartPoint[] {
  return buckets.flatMap(({ n, lo, hi, lo_at, hi_at }): ChartPoint[] => {
    if (n === 1 || lo === hi) return [[lo_at, lo]]
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

/**
 * CO2 of a room's lead sensor between two instants in at most `points` points: the time is cut into half as many stretches, and of
 * each the lowest and the highest reading stay, so that no peak is lost. Outdoor air is the mean of each of up to 200 stretches. Where a
 * stretch is longer than a roll-up, the roll-ups are read in place of the readings: the same extremes, the lowest at a quarter of its
 * roll-up and the highest at three quarters, because when they came is not kept.
 */
export async function readRoomSeries(
  tx: Tx,
  { roomId, buildingId, fromS, toS, points }: Span & { roomId: number; buildingId: number; points: number },
): Promise<RoomSeries> {
  const stretches = Math.max(1, Math.floor(points / 2))
  const state = await rollupState(tx, { buildingId })
  const read = (which: ReturnType<typeof sql>, within: Span, parts: number, finest?: number) => {
    const source = sourceOf({ which, ...within, stretchS: finest ?? (toS - fromS) / parts, ...state })
    return { source, bucket: sql`width_bucket(t, ${fromS}::float8, ${toS}::float8, ${parts}::int)` }
  }
  const room = sql`v.room_id = ${roomId} AND v.lead`
  const line = async (finest?: number) => {
    const { source, bucket } = read(room, { fromS, toS }, stretches, finest)
    const { rows } = await tx.execute<Bucket>(sql`
      SELECT sum(n)::int AS n, min(lo) AS lo, max(hi) AS hi,
        (array_agg(t - apart_s ORDER BY lo, t))[1] AS lo_at, (array_agg(t + apart_s ORDER BY hi DESC, t))[1] AS hi_at
      FROM ${source} GROUP BY ${bucket} ORDER BY min(t)`)
    return rows
  }
  let rows = await line()
  // the raw record of this span may be gone by now, where its roll-ups are kept for longer
  if (rows.length === 0) rows = await line(FINEST_ROLLUP_S)
  const parts = Math.min(200, stretches)
  const { source, bucket } = read(
    sql`v.building_id = ${buildingId} AND v.position = 'outdoor'`,
    { fromS, toS },
    parts,
  )
  const outdoor = await tx.execute<{ t: number; c: number }>(sql`
    SELECT sum(t * n) / sum(n) AS t, sum(mid * n) / sum(n) AS c FROM ${source} GROUP BY ${bucket} ORDER BY 1`)
  return {
    fromS,
    toS,
    points: pointsOf(rows),
    outdoor: outdoor.rows.map(({ t, c }): ChartPoint => [t, c]),
    gapS: Math.max(5 * (await leadInterval(tx, roomId)), (2.5 * (toS - fromS)) / stretches),
  }
}

async function leadInterval(tx: Tx, roomId: number): Promise<number> {
  const { rows } = await tx.execute<{ s: number }>(sql`
    SELECT s.interval_s AS s FROM placements p JOIN sensors s ON s.id = p.sensor_id
    WHERE p.room_id = ${roomId} AND p.lead ORDER BY p.from_at DESC LIMIT 1`)
  return rows[0]?.s ?? 60
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

/** Means of stretches of `resolutionS` seconds in UTC, or of local days (86 400): from the roll-ups, and from the readings where they do not reach. */
export async function listReadingMeans(
  tx: Tx,
  span: Span & { roomId: number; buildingId: number; resolutionS: RollupResolution; timeZone: string },
): Promise<ReadingMean[]> {
  const { roomId, buildingId, fromS, toS, resolutionS, timeZone } = span
  const { rolledToS } = await rollupState(tx, { buildingId })
  const start =
    resolutionS === 86_400
      ? sql`date_trunc('day', v.at, ${timeZone})`
      : sql`date_bin(make_interval(secs => ${resolutionS}), v.at, 'epoch')`
  const [wholeFromS, wholeToS] = await wholeStretches(tx, { ...span, rolledToS })
  const readings = (from: number, to: number) => sql`
    SELECT extract(epoch from ${start})::float8 AS b, v.co2_ppm AS mean, v.co2_ppm AS lowest, v.co2_ppm AS highest, 1 AS n
    FROM visible_readings v WHERE v.room_id = ${roomId} AND v.lead AND v.at >= to_timestamp(${from}) AND v.at < to_timestamp(${to})`
  const { rows } = await tx.execute<ReadingMean>(sql`
    SELECT b AS "atS", sum(mean::float8 * n) / sum(n) AS "meanPpm", min(lowest)::float8 AS "lowestPpm", max(highest)::float8 AS "highestPpm",
      sum(n)::int AS readings
    FROM (${readings(fromS, wholeFromS)} UNION ALL ${readings(wholeToS, toS)} UNION ALL
      SELECT extract(epoch from v.start)::float8, v.mean_ppm, v.lowest_ppm, v.highest_ppm, v.count FROM visible_rollups v
      WHERE v.room_id = ${roomId} AND v.lead AND v.resolution_s = ${resolutionS} AND v.start >= to_timestamp(${wholeFromS})
        AND v.start < to_timestamp(${wholeToS})) AS r
    GROUP BY b ORDER BY b`)
  return rows
}

import { type SQL, sql } from 'drizzle-orm'
import type { Tx } from '../client'

/** Seconds; 86 400 is a building-local day, whatever its length. */
export type RollupResolution = 300 | 900 | 3600 | 86_400
export const FINEST_ROLLUP_S = 300

/** For lines to draw, coarsest first. A building-local day does not divide into a chart's stretches. */
const LINE_RESOLUTIONS_S = [3600, 900, 300] as const

type Span = { fromS: number; toS: number }

/**
 * `rolledToS`: epoch seconds up to which a building's readings are rolled up, −Infinity where they are not or it is not in scope; `keptSinceS`:
 * from when on its organisation keeps the readings themselves, −Infinity where it says nothing.
 */
export type RollupState = { rolledToS: number; keptSinceS: number; hasOffsets: boolean }

/** How far a building's roll-ups reach, and whether any of its sensors has a correction at all: most have none, and a join less is much faster. */
export async function rollupState(tx: Tx, { buildingId }: { buildingId: number }): Promise<RollupState> {
  const { rows } = await tx.execute<{ s: number | null; kept: number | null; corrected: boolean }>(sql`
    SELECT (SELECT extract(epoch from rolled_to)::float8 FROM rollup_progress WHERE building_id = ${buildingId}) AS s,
      (SELECT extract(epoch from now() - make_interval(days => g.readings_kept_days))::float8 FROM organizations g JOIN buildings b ON b.organization_id = g.id
       WHERE b.id = ${buildingId}) AS kept,
      EXISTS (SELECT FROM sensor_offsets o JOIN sensors s ON s.id = o.sensor_id WHERE s.building_id = ${buildingId}) AS corrected`)
  const row = rows[0]
  return {
    rolledToS: row?.s ?? Number.NEGATIVE_INFINITY,
    keptSinceS: row?.kept ?? Number.NEGATIVE_INFINITY,
    hasOffsets: row?.corrected ?? true,
  }
}

/** The coarsest roll-up, seconds, that a stretch of a chart holds whole; null where only readings are fine enough. */
export function resolutionFor(stretchS: number): RollupResolution | null {
  return LINE_RESOLUTIONS_S.find((resolutionS) => stretchS >= resolutionS) ?? null
}

/** The part of a span that roll-ups of a UTC resolution cover: whole ones alone. Empty (from = to = the span's end) where there is none. */
function covered({ fromS, toS }: Span, resolutionS: number, rolledToS: number): [number, number] {
  const from = Math.ceil(fromS / resolutionS) * resolutionS
  const to = Math.floor(Math.min(toS, rolledToS) / resolutionS) * resolutionS
  return to > from ? [from, to] : [toS, toS]
}

/** As `covered`, also for local days, whose bounds PostgreSQL knows. */
export async function wholeStretches(
  tx: Tx,
  span: Span & { resolutionS: RollupResolution; timeZone: string; rolledToS: number },
): Promise<[number, number]> {
  const { fromS, toS, resolutionS, timeZone, rolledToS } = span
  if (resolutionS !== 86_400) return covered(span, resolutionS, rolledToS)
  if (rolledToS <= fromS) return [toS, toS]
  const { rows } = await tx.execute<{ first: number; last: number }>(sql`
    SELECT extract(epoch from CASE WHEN d = f THEN d ELSE (d AT TIME ZONE ${timeZone} + interval '1 day') AT TIME ZONE ${timeZone} END)::float8 AS first,
      extract(epoch from date_trunc('day', to_timestamp(${Math.min(toS, rolledToS)}), ${timeZone}))::float8 AS last
    FROM (SELECT to_timestamp(${fromS}) AS f, date_trunc('day', to_timestamp(${fromS}), ${timeZone}) AS d) AS x`)
  const { first, last } = rows[0] as { first: number; last: number }
  return last > first ? [first, last] : [toS, toS]
}

/** Joins the correction that holds at `instant` as o, or a correction of nothing. Each holds until the next. */
const offsetAt = (instant: string, hasOffsets: boolean) =>
  sql.raw(
    hasOffsets
      ? `LEFT JOIN (SELECT sensor_id AS offset_sensor_id, offset_ppm, from_at,
           lead(from_at) OVER (PARTITION BY sensor_id ORDER BY from_at) AS until FROM sensor_offsets) o
         ON o.offset_sensor_id = v.sensor_id AND ${instant} >= o.from_at AND (o.until IS NULL OR ${instant} < o.until)`
      : 'CROSS JOIN (SELECT 0::float8 AS offset_ppm) o',
  )

/**
 * What a chart's line is drawn from, to stand behind FROM: t (epoch seconds), lo, mid, hi (ppm, corrected by the fresh-air check that holds
 * then), n and apart_s (how far before and after t the lowest and the highest are drawn). From the coarsest roll-ups that a stretch of `stretchS` holds whole, and from the readings before, after and beside
 * them. `which` chooses rows by the columns of visible_readings and visible_rollups, as v.
 */
export function sourceOf({
  which,
  fromS,
  toS,
  stretchS,
  rolledToS,
  keptSinceS,
  hasOffsets,
}: Span & RollupState & { which: SQL; stretchS: number }): SQL {
  // where readings are deleted by policy the finest roll-ups stand in, however short the stretch
  const isPartlyGone = fromS < keptSinceS
  const resolutionS = resolutionFor(stretchS) ?? (isPartlyGone ? FINEST_ROLLUP_S : null)
  const [wholeFromS, wholeToS] =
    resolutionS === null ? [toS, toS] : covered({ fromS, toS }, resolutionS, rolledToS)
  // date_part and not extract, which makes a numeric of every instant: a third of a year's chart
  const readings = (from: number, to: number) => sql`
    SELECT date_part('epoch', v.at) AS t, c AS lo, c AS mid, c AS hi, 1 AS n, 0::float8 AS apart_s
    FROM visible_readings v
    ${offsetAt('v.at', hasOffsets)}
    CROSS JOIN LATERAL (SELECT (v.co2_ppm + coalesce(o.offset_ppm, 0))::float8 AS c) AS corrected
    WHERE ${which} AND v.at >= to_timestamp(${from}) AND v.at < to_timestamp(${to})`
  if (resolutionS === null || wholeToS <= wholeFromS) return sql`(${readings(fromS, toS)}) AS points`
  const rollups = sql`
    SELECT date_part('epoch', v.start) + v.resolution_s / 2.0::float8 AS t, v.lowest_ppm + f AS lo, v.mean_ppm + f AS mid, v.highest_ppm + f AS hi, v.count AS n,
      v.resolution_s / 4.0::float8 AS apart_s
    FROM visible_rollups v
    ${offsetAt('v.start', hasOffsets)}
    CROSS JOIN LATERAL (SELECT coalesce(o.offset_ppm, 0)::float8 AS f) AS correction
    WHERE ${which} AND v.resolution_s = ${resolutionS} AND v.start >= to_timestamp(${wholeFromS}) AND v.start < to_timestamp(${wholeToS})`
  return sql`(${rollups} UNION ALL ${readings(fromS, wholeFromS)} UNION ALL ${readings(wholeToS, toS)}) AS points`
}

import { sql } from 'drizzle-orm'
import { silentAfterS } from '@/lib/air/room-state'
import type { Standing } from '@/lib/wire/sensors'
import type { Tx } from '../client'

/** Sums over the whole deployment: no organisation, building or device is named in any of them. */
export type Heard = { kind: string; atS: number; startedS: number; info: Record<string, unknown> }

/** Every background process that is heard of, with what it says of itself. */
export async function listHeartbeats(tx: Tx): Promise<Heard[]> {
  const { rows } = await tx.execute<Heard>(sql`
    SELECT kind, extract(epoch from at)::float8 AS "atS", extract(epoch from started_at)::float8 AS "startedS", info FROM worker_heartbeats`)
  return rows
}

/** What was refused since an instant, by reason. */
export async function countRefused(
  tx: Tx,
  { since }: { since: Date },
): Promise<{ reason: string; count: number }[]> {
  const { rows } = await tx.execute<{ reason: string; count: number }>(
    sql`SELECT reason, sum(count)::float8 AS count FROM refused_messages WHERE hour >= ${since} GROUP BY 1 ORDER BY 1`,
  )
  return rows
}

/** Sensors by standing, as the sensor list judges it. */
export async function countStandings(tx: Tx, { now }: { now: Date }): Promise<Map<Standing, number>> {
  const { rows } = await tx.execute<{
    standing: Standing | 'spoke'
    silent: number
    interval: number
    n: number
  }>(sql`
    SELECT CASE WHEN s.retired_at IS NOT NULL THEN 'retired' WHEN l.at IS NULL THEN 'awaiting first reading'
        WHEN s.suspect_since IS NOT NULL THEN 'suspect' ELSE 'sound' END AS standing,
      s.interval_s AS interval, floor(extract(epoch from ${now}::timestamptz - greatest(l.at, l.received_at)))::float8 AS silent, count(*)::int AS n
    FROM sensors s LEFT JOIN latest_readings l ON l.sensor_id = s.id GROUP BY 1, 2, 3`)
  const counts = new Map<Standing, number>()
  for (const row of rows) {
    const spoke = row.standing === 'sound' || row.standing === 'suspect'
    const standing = spoke && row.silent > silentAfterS(row.interval) ? 'silent' : (row.standing as Standing)
    counts.set(standing, (counts.get(standing) ?? 0) + row.n)
  }
  return counts
}

/** Jobs by state; `oldestS`: seconds that the oldest one has been due for. */
export async function queueState(tx: Tx): Promise<{ state: string; jobs: number; oldestS: number }[]> {
  const { rows } = await tx.execute<{ state: string; jobs: number; oldestS: number }>(
    sql`SELECT state, jobs, oldest_s AS "oldestS" FROM queue_state() ORDER BY 1`,
  )
  return rows
}

export type StoreFigures = {
  /** rows of readings as the statistics estimate them */
  readings: number
  readingsBytes: number
  rollupsBytes: number
  databaseBytes: number
  months: number
  rollupLagS: number | null
  rollupHours: number
}

/** Size of the record and how far behind its roll-ups are. */
export async function storeFigures(tx: Tx, { now }: { now: Date }): Promise<StoreFigures> {
  const { rows } = await tx.execute<StoreFigures>(sql`
    SELECT (SELECT coalesce(sum(greatest(c.reltuples, 0)), 0)::float8 FROM pg_inherits i JOIN pg_class c ON c.oid = i.inhrelid WHERE i.inhparent = 'readings'::regclass) AS readings,
      (SELECT coalesce(sum(pg_total_relation_size(inhrelid)), 0)::float8 FROM pg_inherits WHERE inhparent = 'readings'::regclass) AS "readingsBytes",
      (SELECT coalesce(sum(pg_total_relation_size(inhrelid)), 0)::float8 FROM pg_inherits WHERE inhparent = 'reading_rollups'::regclass) AS "rollupsBytes",
      pg_database_size(current_database())::float8 AS "databaseBytes",
      (SELECT count(*)::int FROM pg_inherits WHERE inhparent = 'readings'::regclass) AS months,
      (SELECT extract(epoch from ${now}::timestamptz - min(rolled_to))::float8 FROM rollup_progress) AS "rollupLagS",
      (SELECT count(*)::int FROM rollup_hours) AS "rollupHours"`)
  return rows[0] as StoreFigures
}

/** Nights whose newest run failed, over all buildings. */
export async function countFailedNights(tx: Tx): Promise<number> {
  const { rows } = await tx.execute<{ n: number }>(sql`
    SELECT count(*)::int AS n FROM (SELECT DISTINCT ON (building_id, local_date) state FROM night_runs ORDER BY building_id, local_date, started_at DESC) x
    WHERE state = 'failed'`)
  return rows[0]?.n ?? 0
}

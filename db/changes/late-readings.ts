import type pg from 'pg'
import { numberColumns } from '../unnest'

/** What arrived late: epoch milliseconds of its instant and of its arrival. */
export type LateArrival = { buildingId: number; atMs: number; receivedMs: number }

/** Marks the UTC hours of buildings that late arrivals touch, so that the nights they belong to are run again. */
export async function markLateHours(client: pg.ClientBase, arrivals: readonly LateArrival[]): Promise<void> {
  if (arrivals.length === 0) return
  const values = numberColumns(arrivals, [
    (row) => row.buildingId,
    (row) => row.atMs,
    (row) => row.receivedMs,
  ])
  await client.query(
    `INSERT INTO late_readings AS l (building_id, hour, received_at)
     SELECT building_id, date_trunc('hour', to_timestamp(at_ms / 1000), 'UTC') AS hour, max(to_timestamp(received_ms / 1000))
     FROM unnest($1::int[], $2::float8[], $3::float8[]) AS i(building_id, at_ms, received_ms)
     GROUP BY 1, 2 ORDER BY 1, 2
     ON CONFLICT (building_id, hour) DO UPDATE SET received_at = greatest(l.received_at, excluded.received_at)`,
    values,
  )
}

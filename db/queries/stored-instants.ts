import type pg from 'pg'
import { numberColumns } from '../unnest'

/** Which of these sensors and instants (epoch milliseconds) already hold a reading, as `sensor instant`. */
export async function findStoredInstants(
  client: pg.ClientBase,
  rows: readonly { sensorId: number; atMs: number }[],
): Promise<Set<string>> {
  if (rows.length === 0) return new Set()
  const found = await client.query<{ ordinal: number }>(
    `SELECT i.ordinality::int AS ordinal
     FROM unnest($1::int[], $2::float8[]) WITH ORDINALITY AS i(sensor_id, at_ms, ordinality)
     WHERE EXISTS (SELECT FROM readings r WHERE r.sensor_id = i.sensor_id AND r.at = to_timestamp(i.at_ms / 1000))`,
    numberColumns(rows, [(row) => row.sensorId, (row) => row.atMs]),
  )
  return new Set(found.rows.map(({ ordinal }) => instantKey(rows[ordinal - 1]!)))
}

/** The name of a sensor's instant in such a set. */
export function instantKey({ sensorId, atMs }: { sensorId: number; atMs: number }): string {
  return `${sensorId} ${atMs}`
}

import type pg from 'pg'
import { type RefusalReason, SAMPLE_MAX_BYTES } from '@/lib/wire/mqtt'

/** Refusals of one source, reason and hour: their number since the last call, first and last arrival in epoch milliseconds, one sample. */
export type RefusalRow = {
  organizationId: number | null
  sensorId: number | null
  source: string
  reason: RefusalReason
  count: number
  firstMs: number
  lastMs: number
  detail: string
  sample: string | null
}

const hourMs = 3_600_000

/** The UTC hour (epoch milliseconds) under which a refusal is counted. */
export function refusalHourMs(instantMs: number): number {
  return Math.floor(instantMs / hourMs) * hourMs
}

/** Adds refusals to their counts in the running transaction; the first sample of an hour stays. */
export async function addRefusals(client: pg.ClientBase, rows: readonly RefusalRow[]): Promise<void> {
  if (rows.length === 0) return
  // in one order, so that two workers never wait for each other in a ring
  const sorted = [...rows].sort(
    (a, b) => compare(a.source, b.source) || compare(a.reason, b.reason) || a.firstMs - b.firstMs,
  )
  const json = sorted.map((row) => ({
    organization_id: row.organizationId,
    sensor_id: row.sensorId,
    source: storable(row.source, 200),
    reason: row.reason,
    hour: new Date(refusalHourMs(row.firstMs)).toISOString(),
    count: row.count,
    first_at: new Date(row.firstMs).toISOString(),
    last_at: new Date(row.lastMs).toISOString(),
    detail: storable(row.detail, 500),
    sample: row.sample === null ? null : storable(row.sample, SAMPLE_MAX_BYTES),
  }))
  await client.query(
    `INSERT INTO refused_messages AS r (organization_id, sensor_id, source, reason, hour, count, first_at, last_at, detail, sample)
     SELECT organization_id, sensor_id, source, reason, hour, count, first_at, last_at, detail, sample
     FROM json_to_recordset($1) AS i(organization_id int, sensor_id int, source text, reason text, hour timestamptz, count int,
       first_at timestamptz, last_at timestamptz, detail text, sample text)
     ON CONFLICT (source, reason, hour) DO UPDATE SET count = r.count + excluded.count, first_at = least(r.first_at, excluded.first_at),
       last_at = greatest(r.last_at, excluded.last_at), sensor_id = coalesce(r.sensor_id, excluded.sensor_id),
       organization_id = coalesce(r.organization_id, excluded.organization_id)`,
    [JSON.stringify(json)],
  )
}

function compare(a: string, b: string): number {
  return a < b ? -1 : a > b ? 1 : 0
}

/** Text as PostgreSQL can keep it: no zero character, no half of a surrogate pair, not longer than `most`. */
function storable(text: string, most: number): string {
  return Buffer.from(text.slice(0, most).replaceAll('\u0000', '␀')).toString()
}

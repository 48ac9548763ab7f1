import type pg from 'pg'
import { numberColumns } from '../unnest'
import { markLateHours } from './late-readings'

/** A reading to store: instants in epoch milliseconds, ppm, °C, %, %, dBm. */
export type ReadingRow = {
  sensorId: number
  buildingId: number
  atMs: number
  receivedMs: number
  co2Ppm: number
  tempC: number | null
  rhPct: number | null
  batteryPct: number | null
  rssiDbm: number | null
  marked: boolean
}

export type StoredReadings<Row> = {
  /** rows that are in the table because of this call */
  inserted: number
  /** rows whose sensor and instant already hold another value; the stored one stays */
  conflicts: Row[]
}

const columns: readonly ((row: ReadingRow) => number | null)[] = [
  (row) => row.sensorId,
  (row) => row.atMs,
  (row) => row.receivedMs,
  (row) => row.co2Ppm,
  (row) => row.tempC,
  (row) => row.rhPct,
  (row) => row.batteryPct,
  (row) => row.rssiDbm,
  (row) => (row.marked ? 1 : 0),
]

const input = `unnest($1::int[], $2::float8[], $3::float8[], $4::real[], $5::real[], $6::real[], $7::smallint[], $8::smallint[], $9::smallint[])
  AS i(sensor_id, at_ms, received_ms, co2_ppm, temp_c, rh_pct, battery_pct, rssi_dbm, marked)`

const insertReadings = `INSERT INTO readings (sensor_id, at, received_at, co2_ppm, temp_c, rh_pct, battery_pct, rssi_dbm, marked)
  SELECT sensor_id, to_timestamp(at_ms / 1000), to_timestamp(received_ms / 1000), co2_ppm, temp_c, rh_pct, battery_pct, rssi_dbm, marked
  FROM ${input} ON CONFLICT DO NOTHING`

const insertReturning = `${insertReadings} RETURNING sensor_id, extract(epoch FROM at)::float8 * 1000 AS at_ms`

// LATERAL keeps it to one primary-key look-up per row, however large the table has grown
const findConflicts = `SELECT i.ordinality::int AS ordinal
  FROM unnest($1::int[], $2::float8[], $3::real[], $4::real[], $5::real[]) WITH ORDINALITY AS i(sensor_id, at_ms, co2_ppm, temp_c, rh_pct, ordinality)
  CROSS JOIN LATERAL (SELECT r.co2_ppm, r.temp_c, r.rh_pct FROM readings r
    WHERE r.sensor_id = i.sensor_id AND r.at = to_timestamp(i.at_ms / 1000) LIMIT 1) AS stored
  WHERE stored.co2_ppm <> i.co2_ppm OR stored.temp_c <> i.temp_c OR stored.rh_pct <> i.rh_pct`

// a battery level is often sent once an hour only, so the last known one is kept
const upsertLatest = `INSERT INTO latest_readings AS l (sensor_id, at, received_at, co2_ppm, temp_c, rh_pct, battery_pct, rssi_dbm)
  SELECT sensor_id, to_timestamp(at_ms / 1000), to_timestamp(received_ms / 1000), co2_ppm, temp_c, rh_pct, battery_pct, rssi_dbm
  FROM ${input} ON CONFLICT (sensor_id) DO UPDATE SET at = excluded.at, received_at = excluded.received_at, co2_ppm = excluded.co2_ppm,
    temp_c = excluded.temp_c, rh_pct = excluded.rh_pct, battery_pct = coalesce(excluded.battery_pct, l.battery_pct), rssi_dbm = excluded.rssi_dbm
  WHERE excluded.at > l.at`

/** A reading that arrives this long after its instant may touch a night that was already analysed. */
export const LATE_AFTER_MS = 30 * 60_000

/**
 * Stores readings in the running transaction: the first value of a sensor and instant stays, equal ones are harmless, other ones come
 * back as conflicts; the newest of each sensor goes to latest_readings, hours with late ones to late_readings. Throws PostgreSQL's
 * 23514 where a month has no partition: make it (ensureReadingsMonths) and run the transaction again.
 */
export async function storeReadings<Row extends ReadingRow>(
  client: pg.ClientBase,
  rows: readonly Row[],
): Promise<StoredReadings<Row>> {
  const { unique, conflicts } = firstOfEach(rows)
  if (unique.length === 0) return { inserted: 0, conflicts }
  const onTime = unique.filter((row) => row.receivedMs - row.atMs <= LATE_AFTER_MS)
  const late = unique.filter((row) => row.receivedMs - row.atMs > LATE_AFTER_MS)
  let inserted = 0
  if (onTime.length > 0)
    inserted += (await client.query(insertReadings, numberColumns(onTime, columns))).rowCount ?? 0
  if (late.length > 0) inserted += await insertLate(client, late)
  const refused = inserted < unique.length ? await conflictsWithStored(client, unique) : new Set<Row>()
  const newest = newestOfEach(unique.filter((row) => !refused.has(row)))
  if (newest.length > 0) await client.query(upsertLatest, numberColumns(newest, columns))
  return { inserted, conflicts: [...conflicts, ...refused] }
}

/** Sorted by sensor and instant, so that two workers take their locks in one order; the first to arrive of each instant leads. */
function firstOfEach<Row extends ReadingRow>(rows: readonly Row[]): { unique: Row[]; conflicts: Row[] } {
  const sorted = [...rows].sort((a, b) => a.sensorId - b.sensorId || a.atMs - b.atMs)
  const unique: Row[] = []
  const conflicts: Row[] = []
  for (const row of sorted) {
    const first = unique.at(-1)
    if (first?.sensorId !== row.sensorId || first.atMs !== row.atMs) unique.push(row)
    else if (differs(first, row)) conflicts.push(row)
  }
  return { unique, conflicts }
}

function differs(a: ReadingRow, b: ReadingRow): boolean {
  const unlike = (x: number | null, y: number | null) =>
    x !== null && y !== null && Math.fround(x) !== Math.fround(y)
  return unlike(a.co2Ppm, b.co2Ppm) || unlike(a.tempC, b.tempC) || unlike(a.rhPct, b.rhPct)
}

function newestOfEach<Row extends ReadingRow>(sorted: readonly Row[]): Row[] {
  return sorted.filter((row, index) => sorted[index + 1]?.sensorId !== row.sensorId)
}

async function conflictsWithStored<Row extends ReadingRow>(
  client: pg.ClientBase,
  rows: readonly Row[],
): Promise<Set<Row>> {
  const values = numberColumns(
    rows,
    [0, 1, 3, 4, 5].map((index) => columns[index]!),
  )
  const found = await client.query<{ ordinal: number }>(findConflicts, values)
  return new Set(found.rows.map(({ ordinal }) => rows[ordinal - 1]!))
}

/** Inserts late readings and marks the hours of those that are new; a redelivered one must not have its night run again. */
async function insertLate(client: pg.ClientBase, late: readonly ReadingRow[]): Promise<number> {
  const result = await client.query<{ sensor_id: number; at_ms: number }>(
    insertReturning,
    numberColumns(late, columns),
  )
  const key = (sensorId: number, atMs: number) => `${sensorId} ${Math.round(atMs)}`
  const isNew = new Set(result.rows.map((row) => key(row.sensor_id, row.at_ms)))
  await markLateHours(
    client,
    late.filter((row) => isNew.has(key(row.sensorId, row.atMs))),
  )
  return result.rowCount ?? 0
}

/** Makes the partitions of the months in which the instants (epoch milliseconds) lie, where they are missing. */
export async function ensureReadingsMonths(
  client: pg.ClientBase,
  instantsMs: Iterable<number>,
): Promise<void> {
  const months = new Set<string>()
  for (const atMs of instantsMs) months.add(`${new Date(atMs).toISOString().slice(0, 7)}-15T00:00:00Z`)
  for (const month of [...months].sort()) await client.query('SELECT ensure_readings_month($1)', [month])
}

import { asc, eq, sql } from 'drizzle-orm'
import type pg from 'pg'
import { to as copyTo } from 'pg-copy-streams'
import type { Tx } from '../client'
import { buildings, organizations } from '../schema'

/** Every building with how long its organisation keeps readings; null where the organisation says nothing. */
export function listKeptPeriods(tx: Tx): Promise<{ buildingId: number; readingsKeptDays: number | null }[]> {
  return tx
    .select({ buildingId: buildings.id, readingsKeptDays: organizations.readingsKeptDays })
    .from(buildings)
    .innerJoin(organizations, eq(organizations.id, buildings.organizationId))
    .orderBy(asc(buildings.id))
}

export type KeptBy = {
  id: number
  publicId: string
  readingsKeptDays: number | null
  rollupsKeptDays: number | null
  /** epoch seconds up to which all of its buildings are rolled up; null where one with sensors is not yet */
  rolledToS: number | null
}

/** Every organisation with its periods and how far its readings are rolled up. */
export async function listOrganizationsKept(tx: Tx): Promise<KeptBy[]> {
  const { rows } = await tx.execute<KeptBy>(sql`
    SELECT o.id, o.public_id AS "publicId", o.readings_kept_days AS "readingsKeptDays", o.rollups_kept_days AS "rollupsKeptDays",
      (SELECT CASE WHEN count(*) = count(p.rolled_to) THEN extract(epoch from coalesce(min(p.rolled_to), 'infinity'))::float8 END
       FROM buildings b LEFT JOIN rollup_progress p ON p.building_id = b.id
       WHERE b.organization_id = o.id AND EXISTS (SELECT FROM sensors s JOIN latest_readings l ON l.sensor_id = s.id WHERE s.building_id = b.id)) AS "rolledToS"
    FROM organizations o ORDER BY o.id`)
  return rows
}

/** `untilAt`: the first instant after the month. Detached months wait for their archive. */
export type ReadingsMonth = { partition: string; untilAt: Date; attached: boolean }

export async function listReadingsMonths(tx: Tx): Promise<ReadingsMonth[]> {
  const { rows } = await tx.execute<{ partition: string; untilS: number; attached: boolean }>(
    sql`SELECT partition, extract(epoch from until_at)::float8 AS "untilS", attached FROM readings_months()`,
  )
  return rows.map(({ partition, untilS, attached }) => ({
    partition,
    attached,
    untilAt: new Date(untilS * 1000),
  }))
}

/** Rows of a detached month. */
export async function countDetached(client: pg.ClientBase, partition: string): Promise<number> {
  const { rows } = await client.query<{ n: number }>(`SELECT count(*)::int AS n FROM ${named(partition)}`)
  return rows[0]!.n
}

/** A detached month as CSV with a head, by sensor and instant: a stream. Building and sensor stand by their own names, so that it can be read alone. */
export function streamDetached(client: pg.PoolClient, partition: string): NodeJS.ReadableStream {
  return client.query(
    copyTo(`COPY (SELECT b.slug AS building, s.device_id AS sensor, to_char(r.at AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.MS"Z"') AS timestamp,
        to_char(r.received_at AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.MS"Z"') AS received_at, r.co2_ppm, r.temp_c, r.rh_pct, r.battery_pct, r.rssi_dbm
      FROM ${named(partition)} r LEFT JOIN sensors s ON s.id = r.sensor_id LEFT JOIN buildings b ON b.id = s.building_id
      ORDER BY r.sensor_id, r.at) TO STDOUT WITH (FORMAT csv, HEADER)`),
  )
}

function named(partition: string): string {
  if (/^detached_readings_\d{4}_\d{2}$/.test(partition)) return partition
  throw new RangeError(`${partition} is no detached month`)
}

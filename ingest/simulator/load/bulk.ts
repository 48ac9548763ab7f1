import { Readable } from 'node:stream'
import { pipeline } from 'node:stream/promises'
import type pg from 'pg'
import { from as copyFrom } from 'pg-copy-streams'
import { LATE_AFTER_MS } from '@/db/changes/readings'
import type { Database } from '@/db/client'
import { LIVE_CHANNEL, liveNotice } from '@/lib/wire/live'
import { forEachReadingBySensor, type HistoryBatch } from '../history'
import { batteryPct, signalDbm } from '../sensing/radio'
import type { World } from '../world'
import type { DemoIds } from './structure'

const CHUNK_CHARS = 1 << 18
/** A reading of the past reached us this long after it was taken. */
const TRANSIT_S = 2

/** How the rows of a batch are taken: as history that arrived at its time, or as a gap that is filled now. */
export type Arrival = { kind: 'history' } | { kind: 'filled'; at: Date }

/** Makes the months of readings that a span touches. */
export async function ensureMonths(database: Database, fromS: number, toS: number): Promise<void> {
  await database.asSystemRaw('demo months', (client) =>
    client.query(
      `SELECT ensure_readings_month(m) FROM generate_series(date_trunc('month', to_timestamp($1), 'UTC'), to_timestamp($2), interval '1 month') m`,
      [fromS, toS],
    ),
  )
}

/**
 * Stores one batch in one transaction through COPY into a passing table; readings that are there already stay as they are.
 * Returns how many were new.
 */
export async function storeBatch(
  database: Database,
  world: World,
  ids: DemoIds,
  batch: HistoryBatch,
  arrival: Arrival,
): Promise<number> {
  return database.asSystemRaw('demo history', async (client) => {
    await client.query(`CREATE TEMP TABLE demo_batch (sensor_id int, at_s int, co2_ppm real, temp_c real, rh_pct real,
      battery_pct smallint, rssi_dbm smallint) ON COMMIT DROP`)
    const sink = client.query(copyFrom('COPY demo_batch FROM STDIN'))
    await pipeline(Readable.from(rowText(world, ids, batch)), sink)
    const received = arrival.kind === 'history' ? null : arrival.at
    const stored = await client.query(
      `INSERT INTO readings (sensor_id, at, received_at, co2_ppm, temp_c, rh_pct, battery_pct, rssi_dbm, marked)
       SELECT sensor_id, to_timestamp(at_s), coalesce($1::timestamptz, to_timestamp(at_s + ${TRANSIT_S})), co2_ppm, temp_c, rh_pct,
         battery_pct, rssi_dbm, CASE WHEN co2_ppm < 350 OR co2_ppm > 5000 THEN 1 ELSE 0 END
       FROM demo_batch ON CONFLICT DO NOTHING`,
      [received],
    )
    await client.query(latestOfBatch)
    const added = stored.rowCount ?? 0
    if (received && added > 0) await markLate(client, ids.buildingId, received)
    const notice = JSON.stringify(liveNotice('readings', [ids.buildingId]))
    await client.query('SELECT pg_notify($1, $2)', [LIVE_CHANNEL, notice])
    return added
  })
}

const latestOfBatch = `INSERT INTO latest_readings AS l (sensor_id, at, received_at, co2_ppm, temp_c, rh_pct, battery_pct, rssi_dbm)
  SELECT DISTINCT ON (r.sensor_id) r.sensor_id, r.at, r.received_at, r.co2_ppm, r.temp_c, r.rh_pct, r.battery_pct, r.rssi_dbm
  FROM (SELECT sensor_id, max(at_s) AS at_s FROM demo_batch GROUP BY sensor_id) b
  JOIN readings r ON r.sensor_id = b.sensor_id AND r.at = to_timestamp(b.at_s)
  ORDER BY r.sensor_id
  ON CONFLICT (sensor_id) DO UPDATE SET at = excluded.at, received_at = excluded.received_at, co2_ppm = excluded.co2_ppm,
    temp_c = excluded.temp_c, rh_pct = excluded.rh_pct, battery_pct = excluded.battery_pct, rssi_dbm = excluded.rssi_dbm
  WHERE excluded.at > l.at`

/** Hours that a late filling touches, so that nights which were analysed without them are run again. */
async function markLate(client: pg.PoolClient, buildingId: number, received: Date): Promise<void> {
  await client.query(
    `INSERT INTO late_readings AS l (building_id, hour, received_at)
     SELECT DISTINCT $1::int, date_trunc('hour', to_timestamp(at_s), 'UTC'), $2::timestamptz FROM demo_batch
     WHERE to_timestamp(at_s) < $2::timestamptz - make_interval(secs => $3)
     ORDER BY 2
     ON CONFLICT (building_id, hour) DO UPDATE SET received_at = greatest(l.received_at, excluded.received_at)`,
    [buildingId, received, LATE_AFTER_MS / 1000],
  )
}

/** The batch as COPY's text format, in pieces. */
function rowText(world: World, ids: DemoIds, batch: HistoryBatch): string[] {
  const pieces: string[] = []
  let text = ''
  forEachReadingBySensor(batch, (s, timeS, co2Ppm, temperatureC, humidityPct) => {
    if (ids.sensorIds[s] === null) return
    const battery = batteryPct(timeS - world.historyStartS, s)
    text += `${ids.sensorIds[s]}\t${timeS}\t${co2Ppm}\t${temperatureC}\t${humidityPct}\t${battery}\t${signalDbm(s)}\n`
    if (text.length < CHUNK_CHARS) return
    pieces.push(text)
    text = ''
  })
  pieces.push(text)
  return pieces
}

/** Epoch seconds up to which the record of every reporting sensor is whole, or null where there is none yet. */
export async function recordedUntil(database: Database, world: World, ids: DemoIds): Promise<number | null> {
  const silent = world.story.switches.silentSensor ? world.story.silentSensor.deviceId : null
  const reporting = ids.sensorIds.filter(
    (id, i) => id !== null && world.scenario.sensors[i]!.deviceId !== silent,
  )
  const found = await database.asSystemRaw('demo record', (client) =>
    client.query<{ until: number | null; sensors: number }>(
      `SELECT extract(epoch FROM min(at))::float8 AS until, count(*)::int AS sensors FROM latest_readings WHERE sensor_id = ANY($1::int[])`,
      [reporting],
    ),
  )
  const row = found.rows[0]!
  return row.sensors === reporting.length ? row.until : null
}

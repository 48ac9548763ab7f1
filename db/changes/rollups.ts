import type pg from 'pg'
import { LATE_AFTER_MS } from './readings'

/** Stretches of UTC, seconds; each is made from the one before, the first from the readings. Days are made from 900 s. */
const STRETCHES_S = [300, 900, 3600] as const
const FINEST_MS = 300_000
const HOUR_MS = 3_600_000

/** Readings may still come for stretches that are rolled up already, without being late: those are made again. 5 min are for a slow commit. */
const LOOK_BACK_MS = LATE_AFTER_MS + 300_000

/** History is rolled up in steps of so long, each a transaction. */
const STEP_MS = 31 * 86_400_000

/** Marked hours in one transaction. */
const HOURS_AT_ONCE = 500

const floorTo = (ms: number, toMs: number) => Math.floor(ms / toMs) * toMs
const ceilTo = (ms: number, toMs: number) => Math.ceil(ms / toMs) * toMs

/** Instants in epoch milliseconds: what to make again, and the instant by which a stretch must have ended to be made. */
type Span = { buildingId: number; timeZone: string; fromMs: number; toMs: number; rolledToMs: number }

const newOrChanged = (source: string) => `
  INSERT INTO reading_rollups AS u (start, sensor_id, resolution_s, lowest_ppm, mean_ppm, highest_ppm, count)
  SELECT m.start, m.sensor_id, $4::int, m.lowest, m.mean, m.highest, m.count FROM (${source}) AS m
  LEFT JOIN reading_rollups o ON o.sensor_id = m.sensor_id AND o.resolution_s = $4::int AND o.start = m.start AND o.start >= $2 AND o.start < $3
  WHERE o.sensor_id IS NULL OR (o.lowest_ppm, o.mean_ppm, o.highest_ppm, o.count) IS DISTINCT FROM (m.lowest, m.mean, m.highest, m.count)
  ORDER BY m.start, m.sensor_id
  ON CONFLICT (sensor_id, resolution_s, start) DO UPDATE SET lowest_ppm = excluded.lowest_ppm, mean_ppm = excluded.mean_ppm,
    highest_ppm = excluded.highest_ppm, count = excluded.count`

const fromReadings = newOrChanged(`
  SELECT s.id AS sensor_id, date_bin('5 minutes', r.at, 'epoch') AS start, min(r.co2_ppm) AS lowest, avg(r.co2_ppm)::real AS mean,
    max(r.co2_ppm) AS highest, count(*)::int AS count
  FROM sensors s CROSS JOIN LATERAL (SELECT x.at, x.co2_ppm FROM readings x WHERE x.sensor_id = s.id AND x.at >= $2 AND x.at < $3) AS r
  WHERE s.building_id = $1 GROUP BY 1, 2`)

/** From the next finer stretches; `start` is an expression of f.start. */
const fromFiner = (start: string) =>
  newOrChanged(`
  SELECT f.sensor_id, ${start} AS start, min(f.lowest_ppm) AS lowest, (sum(f.mean_ppm::float8 * f.count) / sum(f.count))::real AS mean,
    max(f.highest_ppm) AS highest, sum(f.count)::int AS count
  FROM sensors s JOIN reading_rollups f ON f.sensor_id = s.id
  WHERE s.building_id = $1 AND f.resolution_s = $5::int AND f.start >= $2 AND f.start < $3 GROUP BY 1, 2`)

const fromFinerUtc = fromFiner(`date_bin(make_interval(secs => $4::int), f.start, 'epoch')`)
const fromFinerDay = fromFiner(`date_trunc('day', f.start, $6)`)

const withoutReadings = `
  DELETE FROM reading_rollups u USING sensors s WHERE s.building_id = $1 AND u.sensor_id = s.id AND u.resolution_s = 300
    AND u.start >= $2 AND u.start < $3
    AND NOT EXISTS (SELECT FROM readings r WHERE r.sensor_id = u.sensor_id AND r.at >= u.start AND r.at < u.start + interval '5 minutes')`

const withoutFiner = `
  DELETE FROM reading_rollups u USING sensors s WHERE s.building_id = $1 AND u.sensor_id = s.id AND u.resolution_s = $4::int
    AND u.start >= $2 AND u.start < $3
    AND NOT EXISTS (SELECT FROM reading_rollups f WHERE f.sensor_id = u.sensor_id AND f.resolution_s = $5::int
      AND f.start >= u.start AND f.start < u.start + make_interval(secs => $4::int))`

const withoutDay = `
  DELETE FROM reading_rollups u USING sensors s WHERE s.building_id = $1 AND u.sensor_id = s.id AND u.resolution_s = $4::int
    AND u.start >= $2 AND u.start < $3
    AND NOT EXISTS (SELECT FROM reading_rollups f WHERE f.sensor_id = u.sensor_id AND f.resolution_s = $5::int
      AND f.start >= u.start AND f.start < u.start + interval '25 hours' AND date_trunc('day', f.start, $6) = u.start)`

const dayBounds = `SELECT date_trunc('day', $1::timestamptz, $4) AS day_from,
  least((date_trunc('day', $2::timestamptz - interval '1 microsecond', $4) AT TIME ZONE $4 + interval '1 day') AT TIME ZONE $4,
    date_trunc('day', $3::timestamptz, $4)) AS day_to`

/** Makes the stretches and days that the span touches and that have ended; only rows that are new or other are written. Returns how many. */
async function rollSpan(client: pg.ClientBase, span: Span, isRebuild: boolean): Promise<number> {
  const { buildingId, timeZone, fromMs, toMs, rolledToMs } = span
  let written = 0
  const run = async (text: string, values: unknown[]) => {
    written += (await client.query(text, values)).rowCount ?? 0
  }
  for (const [index, stretchS] of STRETCHES_S.entries()) {
    const from = new Date(floorTo(fromMs, stretchS * 1000))
    const to = new Date(Math.min(ceilTo(toMs, stretchS * 1000), floorTo(rolledToMs, stretchS * 1000)))
    if (to <= from) continue
    const finer = STRETCHES_S[index - 1]
    if (finer === undefined) {
      if (isRebuild) await run(withoutReadings, [buildingId, from, to])
      await run(fromReadings, [buildingId, from, to, stretchS])
    } else {
      if (isRebuild) await run(withoutFiner, [buildingId, from, to, stretchS, finer])
      await run(fromFinerUtc, [buildingId, from, to, stretchS, finer])
    }
  }
  const bounds = await client.query(dayBounds, [
    new Date(fromMs),
    new Date(toMs),
    new Date(rolledToMs),
    timeZone,
  ])
  const { day_from, day_to } = bounds.rows[0] as { day_from: Date; day_to: Date }
  if (day_to > day_from) {
    const values = [buildingId, day_from, day_to, 86_400, 900, timeZone]
    if (isRebuild) await run(withoutDay, values)
    await run(fromFinerDay, values)
  }
  return written
}

type Progress = { timeZone: string; rolledToMs: number }

/** Locks a building's progress, so that one runner at a time rolls it up; begins it at the first reading. Null while there is none. */
async function takeProgress(client: pg.ClientBase, buildingId: number): Promise<Progress | null> {
  const read = async () =>
    (
      await client.query<{ time_zone: string; rolled_to: Date }>(
        `SELECT b.time_zone, p.rolled_to FROM rollup_progress p JOIN buildings b ON b.id = p.building_id WHERE p.building_id = $1 FOR UPDATE OF p`,
        [buildingId],
      )
    ).rows[0]
  let row = await read()
  if (!row) {
    await client.query(
      `INSERT INTO rollup_progress (building_id, rolled_to) SELECT $1, date_bin('5 minutes', min(r.at), 'epoch')
       FROM sensors s CROSS JOIN LATERAL (SELECT x.at FROM readings x WHERE x.sensor_id = s.id ORDER BY x.at LIMIT 1) AS r
       WHERE s.building_id = $1 HAVING min(r.at) IS NOT NULL ON CONFLICT DO NOTHING`,
      [buildingId],
    )
    row = await read()
  }
  return row ? { timeZone: row.time_zone, rolledToMs: row.rolled_to.getTime() } : null
}

export type Rolled = {
  /** rows written or removed */
  written: number
  /** true while more of the same is left for another call */
  more: boolean
}

/**
 * Rolls a building's readings up to the last whole five minutes before `now`, a month of history at most in one call, and moves its
 * progress. Running it again changes nothing. Runs in the transaction of `client`.
 */
export async function rollForward(
  client: pg.ClientBase,
  { buildingId, now }: { buildingId: number; now: Date },
): Promise<Rolled> {
  const progress = await takeProgress(client, buildingId)
  const targetMs = floorTo(now.getTime(), FINEST_MS)
  if (!progress || progress.rolledToMs >= targetMs) return { written: 0, more: false }
  const { timeZone, rolledToMs: beganMs } = progress
  const rolledToMs = Math.min(targetMs, beganMs + STEP_MS)
  const written = await rollSpan(
    client,
    { buildingId, timeZone, fromMs: beganMs - LOOK_BACK_MS, toMs: rolledToMs, rolledToMs },
    false,
  )
  await client.query('UPDATE rollup_progress SET rolled_to = $2 WHERE building_id = $1', [
    buildingId,
    new Date(rolledToMs),
  ])
  return { written, more: rolledToMs < targetMs }
}

/**
 * Makes the hours that late readings marked again, 500 at most in one call. Marks from before `keptSince`, where readings are deleted by
 * now, are dropped: what is left of them must not replace the whole hour's roll-up.
 */
export async function rollLateHours(
  client: pg.ClientBase,
  { buildingId, keptSince }: { buildingId: number; keptSince: Date | null },
): Promise<Rolled> {
  const progress = await takeProgress(client, buildingId)
  if (!progress) return { written: 0, more: false }
  const { timeZone, rolledToMs } = progress
  const taken = await client.query<{ hour: Date }>(
    `DELETE FROM rollup_hours d USING (SELECT hour FROM rollup_hours WHERE building_id = $1 AND hour < $2 ORDER BY hour LIMIT $3) AS h
     WHERE d.building_id = $1 AND d.hour = h.hour RETURNING d.hour`,
    [buildingId, new Date(rolledToMs), HOURS_AT_ONCE],
  )
  const hours = taken.rows.map((row) => row.hour.getTime()).filter((ms) => ms >= (keptSince?.getTime() ?? 0))
  let written = 0
  for (const { fromMs, toMs } of runsOfHours(hours))
    written += await rollSpan(client, { buildingId, timeZone, fromMs, toMs, rolledToMs }, true)
  return { written, more: taken.rows.length === HOURS_AT_ONCE }
}

/** Hours that follow one another as one span. */
function runsOfHours(hoursMs: readonly number[]): { fromMs: number; toMs: number }[] {
  const runs: { fromMs: number; toMs: number }[] = []
  for (const ms of [...hoursMs].sort((a, b) => a - b)) {
    const last = runs.at(-1)
    if (last?.toMs === ms) last.toMs += HOUR_MS
    else runs.push({ fromMs: ms, toMs: ms + HOUR_MS })
  }
  return runs
}

import { and, asc, desc, eq, gte, isNull, sql } from 'drizzle-orm'
import { silentAfterS } from '@/lib/air/room-state'
import type { FirstReading, Position, Refusal, SensorRow, Standing } from '@/lib/wire/sensors'
import { deviceIdKey } from '@/lib/wire/topics'
import type { Tx } from '../client'
import { buildings, floors, placements, refusedMessages, rooms, sensors } from '../schema'

const latest = {
  atS: sql<
    number | null
  >`(SELECT extract(epoch from l.at)::double precision FROM visible_latest l WHERE l.sensor_id = ${sensors.id} LIMIT 1)`,
  receivedS: sql<
    number | null
  >`(SELECT extract(epoch from l.received_at)::double precision FROM visible_latest l WHERE l.sensor_id = ${sensors.id} LIMIT 1)`,
  co2Ppm: sql<
    number | null
  >`(SELECT l.co2_ppm::double precision FROM visible_latest l WHERE l.sensor_id = ${sensors.id} LIMIT 1)`,
  batteryPct: sql<
    number | null
  >`(SELECT l.battery_pct FROM visible_latest l WHERE l.sensor_id = ${sensors.id} LIMIT 1)`,
  rssiDbm: sql<
    number | null
  >`(SELECT l.rssi_dbm FROM visible_latest l WHERE l.sensor_id = ${sensors.id} LIMIT 1)`,
}

const columns = {
  sensor: sensors,
  ...latest,
  position: placements.position,
  lead: placements.lead,
  roomId: rooms.publicId,
  roomNumber: rooms.number,
  roomName: rooms.name,
  floor: floors.name,
  floorOrdinal: floors.ordinal,
  refusedToday: sql<number>`coalesce((SELECT sum(m.count)::int FROM ${refusedMessages} m WHERE m.sensor_id = ${sensors.id} AND m.hour > now() - interval '24 hours'), 0)`,
}

function select(tx: Tx) {
  return tx
    .select(columns)
    .from(sensors)
    .leftJoin(placements, and(eq(placements.sensorId, sensors.id), isNull(placements.toAt)))
    .leftJoin(rooms, eq(rooms.id, placements.roomId))
    .leftJoin(floors, eq(floors.id, rooms.floorId))
}

type Row = Awaited<ReturnType<typeof select>>[number]

/** Sensors of a building in the order of their places. Standing is judged at `now` from readings, by each sensor's own interval. */
export async function listSensors(
  tx: Tx,
  { buildingId, now }: { buildingId: number; now: Date },
): Promise<SensorRow[]> {
  const rows = await select(tx)
    .where(eq(sensors.buildingId, buildingId))
    .orderBy(asc(floors.ordinal), asc(rooms.number), desc(placements.lead), asc(sensors.deviceId))
  return rows.map((row) => toRow(row, now))
}

/** One sensor by device id (without case), or undefined where there is none in scope. */
export async function getSensor(
  tx: Tx,
  { deviceId, now }: { deviceId: string; now: Date },
): Promise<SensorRow | undefined> {
  const [row] = await select(tx).where(eq(sensors.deviceIdKey, deviceIdKey(deviceId)))
  return row && toRow(row, now)
}

function toRow(row: Row, now: Date): SensorRow {
  const [standing, standingWords] = standingOf(row, now)
  return {
    deviceId: row.sensor.deviceId,
    label: row.sensor.label,
    standing,
    standingWords,
    position: row.position as Position | null,
    lead: row.lead ?? false,
    room:
      row.roomId && row.roomNumber && row.roomName
        ? {
            id: row.roomId,
            number: row.roomNumber,
            name: row.roomName,
            floor: row.floor ?? '',
            floorOrdinal: row.floorOrdinal ?? 0,
          }
        : null,
    lastAtS: row.atS,
    co2Ppm: row.co2Ppm,
    batteryPct: row.batteryPct,
    rssiDbm: row.rssiDbm,
    intervalS: row.sensor.intervalS,
    refusedToday: row.refusedToday,
    registeredS: row.sensor.createdAt.getTime() / 1000,
  }
}

function standingOf(row: Row, now: Date): [Standing, string | null] {
  if (row.sensor.retiredAt) return ['retired', null]
  if (row.atS === null || row.receivedS === null)
    return ['awaiting first reading', 'Registered, nothing heard yet.']
  const silentS = now.getTime() / 1000 - Math.max(row.atS, row.receivedS)
  if (silentS > silentAfterS(row.sensor.intervalS)) {
    return [
      'silent',
      `Nothing heard for ${words(silentS)}; it should speak every ${words(row.sensor.intervalS)}.`,
    ]
  }
  if (row.sensor.suspectSince) return ['suspect', row.sensor.suspectReason]
  return ['sound', null]
}

function words(seconds: number): string {
  if (seconds < 90) return `${Math.round(seconds)} s`
  if (seconds < 5400) return `${Math.round(seconds / 60)} min`
  return seconds < 129_600 ? `${Math.round(seconds / 3600)} h` : `${Math.round(seconds / 86_400)} days`
}

/** What has been heard from a sensor since it was registered; undefined where there is none in scope. */
export async function getFirstReading(
  tx: Tx,
  { deviceId }: { deviceId: string },
): Promise<FirstReading | undefined> {
  const [row] = await select(tx).where(eq(sensors.deviceIdKey, deviceIdKey(deviceId)))
  if (!row) return undefined
  const heard = await tx.execute<{ temp_c: number | null; rh_pct: number | null }>(
    sql`SELECT temp_c, rh_pct FROM visible_latest WHERE sensor_id = ${row.sensor.id} LIMIT 1`,
  )
  const [refused] = await tx
    .select()
    .from(refusedMessages)
    .where(
      and(eq(refusedMessages.sensorId, row.sensor.id), gte(refusedMessages.lastAt, row.sensor.createdAt)),
    )
    .orderBy(desc(refusedMessages.lastAt))
    .limit(1)
  return {
    deviceId: row.sensor.deviceId,
    heard: row.atS !== null,
    atS: row.atS,
    receivedS: row.receivedS,
    co2Ppm: row.co2Ppm,
    tempC: heard.rows[0]?.temp_c ?? null,
    rhPct: heard.rows[0]?.rh_pct ?? null,
    batteryPct: row.batteryPct,
    rssiDbm: row.rssiDbm,
    refused: refused
      ? {
          reason: refused.reason,
          detail: refused.detail,
          count: refused.count,
          lastS: refused.lastAt.getTime() / 1000,
        }
      : null,
  }
}

/** The rooms and corridors a sensor may be placed in, in the order of the building. */
export async function listPlaces(tx: Tx, { buildingId }: { buildingId: number }) {
  return tx
    .select({
      id: rooms.publicId,
      number: rooms.number,
      name: rooms.name,
      kind: rooms.kind,
      floor: floors.name,
    })
    .from(rooms)
    .innerJoin(floors, eq(floors.id, rooms.floorId))
    .where(eq(rooms.buildingId, buildingId))
    .orderBy(asc(floors.ordinal), asc(rooms.number))
}

/** Slug of the building, the {site} of its sensors' topics. */
export async function getSite(tx: Tx, { buildingId }: { buildingId: number }): Promise<string | undefined> {
  const [row] = await tx.select({ slug: buildings.slug }).from(buildings).where(eq(buildings.id, buildingId))
  return row?.slug
}

/** What was refused of a sensor's messages and connects in the last 14 days, newest hour first. */
export async function listRefusals(tx: Tx, { deviceId }: { deviceId: string }): Promise<Refusal[]> {
  return tx
    .select({
      reason: refusedMessages.reason,
      detail: refusedMessages.detail,
      hourS: sql<number>`extract(epoch from ${refusedMessages.hour})::double precision`,
      count: refusedMessages.count,
      sample: refusedMessages.sample,
    })
    .from(refusedMessages)
    .innerJoin(sensors, eq(sensors.id, refusedMessages.sensorId))
    .where(
      and(
        eq(sensors.deviceIdKey, deviceIdKey(deviceId)),
        sql`${refusedMessages.hour} > now() - interval '14 days'`,
      ),
    )
    .orderBy(desc(refusedMessages.hour))
    .limit(50)
}

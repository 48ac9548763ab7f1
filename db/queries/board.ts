import { and, asc, desc, eq, inArray, isNull, sql } from 'drizzle-orm'
import type { Tx } from '../client'
import {
  airHandlers,
  buildings,
  floors,
  hours,
  placements,
  rooms,
  roomTenancies,
  roomWeeks,
  sensorOffsets,
  sensors,
  supplyStates,
  tenancies,
} from '../schema'
import { listClosures } from './closures'

/** The lead sensor of a room, or the outdoor sensor where `roomId` is null. */
export type BoardSensor = {
  sensorId: number
  roomId: number | null
  intervalS: number
  suspectSinceS: number | null
  suspectReason: string | null
  /** newest reading ever, for a sensor that has been silent since before today */
  lastS: number | null
  lastPpm: number | null
}

const epochOf = (name: string) => sql<number>`extract(epoch from ${sql.raw(name)})::double precision`

/** A building's rooms that stand on the board, in walking order: top floor first, then by number. Its tenancy is the present one. */
export function listBoardRooms(tx: Tx, { buildingId }: { buildingId: number }) {
  return tx
    .select({
      id: rooms.id,
      publicId: rooms.publicId,
      number: rooms.number,
      name: rooms.name,
      use: rooms.use,
      floorId: rooms.floorId,
      airHandlerId: rooms.airHandlerId,
      singlePerson: rooms.singlePerson,
      limitKind: rooms.limitKind,
      limitPpm: rooms.limitPpm,
      tenancy: tenancies.name,
    })
    .from(rooms)
    .innerJoin(floors, eq(floors.id, rooms.floorId))
    .leftJoin(roomTenancies, and(eq(roomTenancies.roomId, rooms.id), isNull(roomTenancies.toAt)))
    .leftJoin(tenancies, eq(tenancies.id, roomTenancies.tenancyId))
    .where(and(eq(rooms.buildingId, buildingId), eq(rooms.kind, 'room')))
    .orderBy(desc(floors.ordinal), asc(rooms.number))
}

/** The newest verdict of each room in its occupied mode, with what its ventilation supports. */
export function listBoardVerdicts(tx: Tx, { buildingId }: { buildingId: number }) {
  return tx
    .selectDistinctOn([roomWeeks.roomId], {
      roomId: roomWeeks.roomId,
      verdict: roomWeeks.verdict,
      supportsPersons: roomWeeks.supportsPersons,
      designHeadcount: roomWeeks.designHeadcount,
    })
    .from(roomWeeks)
    .where(and(eq(roomWeeks.buildingId, buildingId), inArray(roomWeeks.mode, ['supply on', 'natural'])))
    .orderBy(roomWeeks.roomId, desc(roomWeeks.weekStart), desc(roomWeeks.computedAt))
}

/** Lead sensors of the building's rooms and its outdoor sensors, as placed now. */
export function listBoardSensors(tx: Tx, { buildingId }: { buildingId: number }): Promise<BoardSensor[]> {
  return tx
    .select({
      sensorId: sensors.id,
      roomId: placements.roomId,
      intervalS: sensors.intervalS,
      suspectSinceS: sql<number | null>`extract(epoch from ${sensors.suspectSince})::double precision`,
      suspectReason: sensors.suspectReason,
      lastS: sql<
        number | null
      >`(SELECT extract(epoch from l.at)::double precision FROM visible_latest l WHERE l.sensor_id = ${sensors.id})`,
      lastPpm: sql<
        number | null
      >`(SELECT l.co2_ppm::double precision FROM visible_latest l WHERE l.sensor_id = ${sensors.id})`,
    })
    .from(placements)
    .innerJoin(sensors, eq(sensors.id, placements.sensorId))
    .where(
      and(
        eq(placements.buildingId, buildingId),
        isNull(placements.toAt),
        isNull(sensors.retiredAt),
        sql`(${placements.lead} OR ${placements.position} = 'outdoor')`,
      ),
    )
}

/** Everything about a board that changes seldom. */
export async function readBoardPlan(tx: Tx, { buildingId }: { buildingId: number }) {
  const [building] = await tx.select().from(buildings).where(eq(buildings.id, buildingId))
  if (!building) return undefined
  const floorRows = await tx
    .select({ id: floors.id, name: floors.name, ordinal: floors.ordinal })
    .from(floors)
    .where(eq(floors.buildingId, buildingId))
    .orderBy(desc(floors.ordinal))
  const supply = await tx
    .selectDistinctOn([supplyStates.airHandlerId], {
      airHandlerId: supplyStates.airHandlerId,
      state: supplyStates.state,
      sinceS: epochOf('supply_states.at'),
    })
    .from(supplyStates)
    .innerJoin(airHandlers, eq(airHandlers.id, supplyStates.airHandlerId))
    .where(eq(supplyStates.buildingId, buildingId))
    .orderBy(supplyStates.airHandlerId, desc(supplyStates.at))
  return {
    building,
    floors: floorRows,
    supply,
    supplyHours: await tx
      .select({
        airHandlerId: hours.airHandlerId,
        days: hours.days,
        from: hours.fromLocal,
        to: hours.toLocal,
      })
      .from(hours)
      .where(and(eq(hours.buildingId, buildingId), eq(hours.purpose, 'supply'))),
    closures: await listClosures(tx, { buildingId }),
    rooms: await listBoardRooms(tx, { buildingId }),
    verdicts: await listBoardVerdicts(tx, { buildingId }),
    sensors: await listBoardSensors(tx, { buildingId }),
    offsets: await tx
      .select({
        sensorId: sensorOffsets.sensorId,
        fromS: epochOf('sensor_offsets.from_at'),
        offsetPpm: sensorOffsets.offsetPpm,
      })
      .from(sensorOffsets)
      .innerJoin(sensors, eq(sensors.id, sensorOffsets.sensorId))
      .where(eq(sensors.buildingId, buildingId))
      .orderBy(asc(sensorOffsets.fromAt)),
  }
}
export type BoardPlan = NonNullable<Awaited<ReturnType<typeof readBoardPlan>>>

export type BoardReading = { sensorId: number; timeS: number; co2Ppm: number }

/** Readings of the board's sensors since `sinceS`, rising in time. */
export async function listBoardReadings(
  tx: Tx,
  { buildingId, sinceS }: { buildingId: number; sinceS: number },
): Promise<BoardReading[]> {
  const { rows } = await tx.execute<{ s: number; t: number; c: number }>(sql`
    SELECT sensor_id AS s, extract(epoch from at)::double precision AS t, co2_ppm::double precision AS c
    FROM visible_readings
    WHERE building_id = ${buildingId} AND at >= to_timestamp(${sinceS}) AND (lead OR position = 'outdoor')
    ORDER BY at`)
  return rows.map(({ s, t, c }) => ({ sensorId: s, timeS: t, co2Ppm: c }))
}

/**
 * The rooms of the board that this scope may see, by public id, and whether their live value is for it. This query runs in the
 * reader's own scope, so row-level security decides; a tenant sees live what the tenancy holds now, not what it held once.
 */
export async function listVisibleRooms(
  tx: Tx,
  { buildingId, hidesSinglePerson, now }: { buildingId: number; hidesSinglePerson: boolean; now: Date },
): Promise<Map<string, { live: boolean }>> {
  const rows = await tx
    .select({ publicId: rooms.publicId, singlePerson: rooms.singlePerson })
    .from(rooms)
    .where(
      and(
        eq(rooms.buildingId, buildingId),
        eq(rooms.kind, 'room'),
        sql`ebb_holds(${rooms.id}, ${now.toISOString()}::timestamptz)`,
      ),
    )
  return new Map(rows.map((row) => [row.publicId, { live: !(hidesSinglePerson && row.singlePerson) }]))
}

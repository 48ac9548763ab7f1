import { and, asc, desc, eq, gte, inArray, isNull, or, sql } from 'drizzle-orm'
import { silentAfterS } from '@/lib/air/room-state'
import type { Mode } from '@/lib/air/types'
import type { Room, RoomChange, RoomFinding, RoomSensor, RoomVerdictRow, RoomWeek } from '@/lib/wire/rooms'
import type { Tx } from '../client'
import {
  airHandlers,
  buildings,
  findings,
  floors,
  placements,
  rateChanges,
  roomDesigns,
  rooms,
  roomTenancies,
  roomWeeks,
  sensors,
  tenancies,
} from '../schema'

export type RoomIdentity = {
  id: number
  buildingId: number
  airHandlerId: number | null
  timeZone: string
  buildingSlug: string
  room: Room
}

const occupiedModes = ['supply on', 'natural']

/** A room by its public id, with its newest design and present tenancy; undefined where it is not, or not in scope. */
export async function getRoom(tx: Tx, { publicId }: { publicId: string }): Promise<RoomIdentity | undefined> {
  const [row] = await tx
    .select({
      room: rooms,
      floor: floors.name,
      building: buildings,
      tenancy: tenancies.name,
      handler: airHandlers,
      design: roomDesigns,
    })
    .from(rooms)
    .innerJoin(floors, eq(floors.id, rooms.floorId))
    .innerJoin(buildings, eq(buildings.id, rooms.buildingId))
    .leftJoin(airHandlers, eq(airHandlers.id, rooms.airHandlerId))
    .leftJoin(roomTenancies, and(eq(roomTenancies.roomId, rooms.id), isNull(roomTenancies.toAt)))
    .leftJoin(tenancies, eq(tenancies.id, roomTenancies.tenancyId))
    .leftJoin(
      roomDesigns,
      and(eq(roomDesigns.roomId, rooms.id), sql`${roomDesigns.validFrom} <= current_date`),
    )
    .where(eq(rooms.publicId, publicId))
    .orderBy(desc(roomDesigns.validFrom))
    .limit(1)
  if (!row) return undefined
  const { room, building, handler, design } = row
  return {
    id: room.id,
    buildingId: building.id,
    airHandlerId: room.airHandlerId,
    timeZone: building.timeZone,
    buildingSlug: building.slug,
    room: {
      id: room.publicId,
      number: room.number,
      name: room.name,
      use: room.use,
      floor: row.floor,
      tenancy: row.tenancy,
      singlePerson: room.singlePerson,
      airHandler: handler?.name ?? null,
      airSystem: room.airSystem ?? handler?.airSystem ?? 'unknown',
      limitKind: room.limitKind,
      limitPpm: room.limitPpm,
      limitOrigin: room.limitOrigin,
      volumeM3: design?.volumeM3 ?? null,
      floorAreaM2: design?.floorAreaM2 ?? null,
      designHeadcount: design?.designHeadcount ?? null,
      permittedOccupancy: design?.permittedOccupancy ?? null,
    },
  }
}

/** The newest verdict of a room's occupied mode. */
export async function getRoomVerdict(tx: Tx, { roomId }: { roomId: number }): Promise<RoomVerdictRow | null> {
  const [week] = await tx
    .select()
    .from(roomWeeks)
    .where(and(eq(roomWeeks.roomId, roomId), inArray(roomWeeks.mode, occupiedModes)))
    .orderBy(desc(roomWeeks.weekStart), desc(roomWeeks.computedAt))
    .limit(1)
  if (!week?.verdict) return null
  return {
    mode: week.mode as Mode,
    modeFrom: week.modeFrom,
    throughNight: week.throughNight,
    verdict: week.verdict,
    reason: week.verdictReason,
    sentence: week.verdictSentence ?? '',
    rate: week.verdictRatePerHour,
    rateLow: week.verdictRateLowPerHour,
    rateHigh: week.verdictRateHighPerHour,
    days: week.verdictDays ?? 0,
    decays: week.verdictDecays ?? 0,
    since: week.verdictSince,
    isDilutionRate: week.isDilutionRate,
    flowLps: week.flowLps,
    flowLowLps: week.flowLowLps,
    flowHighLps: week.flowHighLps,
    basisName: week.basisName,
    basisFlowLps: week.basisFlowLps,
    designHeadcount: week.designHeadcount,
    supportsPersons: week.supportsPersons,
    volumeM3: week.volumeM3,
  }
}

/** Weekly rates of every mode since a date, oldest first, of the newest method version. */
export async function listRoomWeeks(
  tx: Tx,
  { roomId, sinceWeek }: { roomId: number; sinceWeek: string },
): Promise<RoomWeek[]> {
  const rows = await tx
    .selectDistinctOn([roomWeeks.weekStart, roomWeeks.mode])
    .from(roomWeeks)
    .where(and(eq(roomWeeks.roomId, roomId), gte(roomWeeks.weekStart, sinceWeek)))
    .orderBy(asc(roomWeeks.weekStart), asc(roomWeeks.mode), desc(roomWeeks.computedAt))
  return rows.map((week) => ({
    weekStart: week.weekStart,
    mode: week.mode as Mode,
    rate: week.airChangeRatePerHour,
    low: week.airChangeRateLowPerHour,
    high: week.airChangeRateHighPerHour,
    days: week.days,
    decays: week.decays,
    decaysRefused: week.decaysRefused,
  }))
}

/** Changes of the room's rate in its occupied mode, newest first, of the newest method version. */
export async function listRoomChanges(tx: Tx, { roomId }: { roomId: number }): Promise<RoomChange[]> {
  const rows = await tx
    .selectDistinctOn([rateChanges.onNight, rateChanges.kind])
    .from(rateChanges)
    .where(and(eq(rateChanges.roomId, roomId), inArray(rateChanges.mode, occupiedModes)))
    .orderBy(desc(rateChanges.onNight), rateChanges.kind, desc(rateChanges.foundAt))
  return rows.map(({ mode, kind, onNight, ratio, sentence }) => ({
    mode: mode as Mode,
    kind,
    onNight,
    ratio,
    sentence,
  }))
}

/** What the nightly job found about the room or its air handler, newest first. */
export function listRoomFindings(
  tx: Tx,
  { roomId, airHandlerId }: { roomId: number; airHandlerId: number | null },
): Promise<RoomFinding[]> {
  return tx
    .select({
      kind: findings.kind,
      sentence: findings.sentence,
      firstNight: findings.firstNight,
      lastNight: findings.lastNight,
      nights: findings.nights,
    })
    .from(findings)
    .where(
      airHandlerId === null
        ? eq(findings.roomId, roomId)
        : or(
            eq(findings.roomId, roomId),
            and(isNull(findings.roomId), eq(findings.airHandlerId, airHandlerId)),
          ),
    )
    .orderBy(desc(findings.lastNight), asc(findings.id))
    .limit(12)
}

/** Sensors placed in the room now, the lead one first, with their standing at `nowS`. */
export async function listRoomSensors(
  tx: Tx,
  { roomId, nowS }: { roomId: number; nowS: number },
): Promise<RoomSensor[]> {
  const rows = await tx
    .select({
      sensor: sensors,
      position: placements.position,
      lead: placements.lead,
      atS: sql<
        number | null
      >`(SELECT extract(epoch from l.at)::double precision FROM visible_latest l WHERE l.sensor_id = ${sensors.id})`,
      co2Ppm: sql<
        number | null
      >`(SELECT l.co2_ppm::double precision FROM visible_latest l WHERE l.sensor_id = ${sensors.id})`,
    })
    .from(placements)
    .innerJoin(sensors, eq(sensors.id, placements.sensorId))
    .where(and(eq(placements.roomId, roomId), isNull(placements.toAt)))
    .orderBy(desc(placements.lead), asc(sensors.deviceId))
  return rows.map(({ sensor, position, lead, atS, co2Ppm }) => ({
    deviceId: sensor.deviceId,
    label: sensor.label,
    position,
    lead,
    standing: standingOf(sensor, atS, nowS),
    standingWords: sensor.suspectSince ? sensor.suspectReason : null,
    co2Ppm,
    lastAtS: atS,
  }))
}

function standingOf(
  sensor: Pick<typeof sensors.$inferSelect, 'retiredAt' | 'suspectSince' | 'intervalS'>,
  atS: number | null,
  nowS: number,
): RoomSensor['standing'] {
  if (sensor.retiredAt) return 'retired'
  if (atS === null) return 'awaiting first reading'
  if (nowS - atS > silentAfterS(sensor.intervalS)) return 'silent'
  return sensor.suspectSince ? 'suspect' : 'sound'
}

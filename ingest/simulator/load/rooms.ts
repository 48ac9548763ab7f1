import { eq } from 'drizzle-orm'
import type { Tx } from '@/db/client'
import { deviceSecretSha256 } from '@/db/device-secret'
import { newPublicId } from '@/db/public-id'
import { bases, placements, roomDesigns, rooms, roomTenancies, sensors } from '@/db/schema'
import { deviceIdKey } from '@/lib/wire/topics'
import { sensorSecret } from '../demo-files'
import { dateOf } from '../local-time'
import type { CorridorPlan, RoomPlan } from '../scenario'
import type { World } from '../world'

export type Here = { organizationId: number; buildingId: number }

const YEAR_S = 365 * 86400

/** Row ids by the plan's keys, in whose order the rows were inserted. */
export function byKey(keys: readonly string[], rows: readonly { id: number }[]): Record<string, number> {
  return Object.fromEntries(keys.map((key, i) => [key, rows[i]!.id]))
}

async function insertBases(tx: Tx, organizationId: number): Promise<{ standard: number; design: number }> {
  const rows = await tx
    .insert(bases)
    .values([
      {
        organizationId,
        name: 'EN 16798-1:2019 category II, low-polluting building',
        kind: 'per-person',
        flowLpsPerPerson: 7,
        flowLpsPerM2: 0.7,
      },
      { organizationId, name: 'Design flow of the room', kind: 'design-flow' },
    ])
    .returning({ id: bases.id })
  return { standard: rows[0]!.id, design: rows[1]!.id }
}

export type RoomKeys = {
  floorIds: Record<string, number>
  handlerIds: Record<string, number>
  tenancyIds: Record<string, number>
}

/** Rooms and landings with their designs, bases and tenancies; by their numbers. */
export async function insertRooms(
  tx: Tx,
  world: World,
  here: Here,
  keys: RoomKeys,
  start: Date,
): Promise<Record<string, number>> {
  const basis = await insertBases(tx, here.organizationId)
  const values = world.zones.map((zone) => roomRow(zone, here, keys, basis, start))
  const rows = await tx.insert(rooms).values(values).returning({ id: rooms.id })
  const ids = byKey(
    world.zones.map((zone) => zone.number),
    rows,
  )
  await tx.insert(roomDesigns).values(
    world.zones.map((zone) => ({
      organizationId: here.organizationId,
      roomId: ids[zone.number]!,
      validFrom: dateOf(Math.floor((world.historyStartS - 2 * YEAR_S) / 86400)),
      volumeM3: zone.volumeM3,
      floorAreaM2: zone.floorAreaM2,
      designHeadcount: 'activity' in zone ? zone.designHeadcount : 0,
      permittedOccupancy: 'activity' in zone ? zone.permittedOccupancy : null,
      designFlowLps: 'activity' in zone ? zone.designFlowLps : null,
    })),
  )
  const held = world.scenario.rooms.filter((room) => room.tenancy !== null)
  await tx.insert(roomTenancies).values(
    held.map((room) => ({
      organizationId: here.organizationId,
      roomId: ids[room.number]!,
      tenancyId: keys.tenancyIds[room.tenancy!]!,
      fromAt: new Date((world.historyStartS - YEAR_S) * 1000),
    })),
  )
  await joinNeighbour(tx, world, ids)
  return ids
}

function roomRow(
  zone: RoomPlan | CorridorPlan,
  here: Here,
  keys: RoomKeys,
  basis: { standard: number; design: number },
  start: Date,
): typeof rooms.$inferInsert {
  const room = 'activity' in zone ? zone : null
  return {
    ...here,
    publicId: newPublicId(),
    floorId: keys.floorIds[zone.floor]!,
    airHandlerId: zone.airHandler === null ? null : keys.handlerIds[zone.airHandler]!,
    kind: room ? 'room' : 'corridor',
    number: zone.number,
    name: zone.name,
    use: room?.use ?? 'landing',
    airSystem: room?.airSystem ?? null,
    singlePerson: room?.singlePerson ?? false,
    basisId: room ? (room.designFlowLps === null ? basis.standard : basis.design) : null,
    createdAt: start,
  }
}

/** The plan shows which room's door stands open to its landing. */
async function joinNeighbour(tx: Tx, world: World, ids: Record<string, number>): Promise<void> {
  const { room: number } = world.story.openDoor
  const room = world.scenario.rooms.find((r) => r.number === number)!
  const landing = world.zones[world.corridorOfFloor.get(room.floor)!]!
  await tx.update(rooms).set({ neighbourRoomId: ids[landing.number]! }).where(eq(rooms.id, ids[number]!))
}

/** What the database keeps of a demo sensor's secret. */
export const secretHash = (key: string, deviceId: string) => deviceSecretSha256(sensorSecret(key, deviceId))

/** Sensors and where they hang, in the plan's order. */
export async function insertSensors(
  tx: Tx,
  world: World,
  here: Here,
  roomIds: Record<string, number>,
  key: string,
  start: Date,
): Promise<number[]> {
  const plans = world.scenario.sensors
  const rows = await tx
    .insert(sensors)
    .values(
      plans.map(({ deviceId, label, model }) => ({
        ...here,
        deviceId,
        deviceIdKey: deviceIdKey(deviceId),
        label,
        secretSha256: secretHash(key, deviceId),
        intervalS: 60,
        accuracyPpm: model.accuracyPpm,
        accuracyPct: model.accuracyPct,
        resolutionPpm: model.resolutionPpm,
        rangeMaxPpm: model.rangeMaxPpm,
        createdAt: start,
      })),
    )
    .returning({ id: sensors.id })
  await tx.insert(placements).values(
    plans.map(({ place, position, lead }, i) => ({
      ...here,
      sensorId: rows[i]!.id,
      roomId: place === null ? null : roomIds[place]!,
      position,
      lead,
      fromAt: start,
    })),
  )
  return rows.map((row) => row.id)
}

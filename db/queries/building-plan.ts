import { and, asc, eq, gte, inArray, lt, lte, sql } from 'drizzle-orm'
import type { Tx } from '../client'
import {
  airHandlers,
  bases,
  buildings,
  closures,
  floors,
  hours,
  placements,
  roomDesigns,
  rooms,
  roomTenancies,
  sensorOffsets,
  sensors,
  supplyStates,
  tenancies,
} from '../schema'

export type BuildingPlan = Awaited<ReturnType<typeof loadPlan>>
export type PlanRoom = BuildingPlan['rooms'][number]
export type PlanDesign = BuildingPlan['designs'][number]
export type PlanPlacement = BuildingPlan['placements'][number]

async function loadPlan(tx: Tx, building: typeof buildings.$inferSelect) {
  const here = { buildingId: building.id }
  const roomRows = await tx
    .select()
    .from(rooms)
    .where(eq(rooms.buildingId, here.buildingId))
    .orderBy(rooms.id)
  const roomIds = roomRows.map((room) => room.id)
  const placementRows = await tx
    .select()
    .from(placements)
    .where(eq(placements.buildingId, here.buildingId))
    .orderBy(placements.id)
  const sensorIds = [...new Set(placementRows.map((placement) => placement.sensorId))]
  return {
    building,
    floors: await tx.select().from(floors).where(eq(floors.buildingId, here.buildingId)).orderBy(floors.id),
    rooms: roomRows,
    designs: await tx
      .select()
      .from(roomDesigns)
      .where(inArray(roomDesigns.roomId, roomIds))
      .orderBy(roomDesigns.roomId, asc(roomDesigns.validFrom)),
    bases: await tx
      .select()
      .from(bases)
      .where(eq(bases.organizationId, building.organizationId))
      .orderBy(bases.id),
    airHandlers: await tx
      .select()
      .from(airHandlers)
      .where(eq(airHandlers.buildingId, here.buildingId))
      .orderBy(airHandlers.id),
    hours: await tx.select().from(hours).where(eq(hours.buildingId, here.buildingId)).orderBy(hours.id),
    closures: await tx
      .select()
      .from(closures)
      .where(eq(closures.buildingId, here.buildingId))
      .orderBy(closures.id),
    tenancies: await tx
      .select()
      .from(tenancies)
      .where(eq(tenancies.buildingId, here.buildingId))
      .orderBy(tenancies.id),
    roomTenancies: await tx
      .select()
      .from(roomTenancies)
      .where(inArray(roomTenancies.roomId, roomIds))
      .orderBy(roomTenancies.id),
    placements: placementRows,
    sensors: await tx.select().from(sensors).where(inArray(sensors.id, sensorIds)).orderBy(sensors.id),
    offsets: await tx
      .select()
      .from(sensorOffsets)
      .where(inArray(sensorOffsets.sensorId, sensorIds))
      .orderBy(sensorOffsets.sensorId, asc(sensorOffsets.fromAt), sensorOffsets.id),
  }
}

/** Everything that is known of a building apart from what its sensors said: what an analysis of its nights needs, in a fixed order. */
export async function getBuildingPlan(
  tx: Tx,
  { buildingId }: { buildingId: number },
): Promise<BuildingPlan | undefined> {
  const [building] = await tx.select().from(buildings).where(eq(buildings.id, buildingId))
  return building && loadPlan(tx, building)
}

/** As getBuildingPlan. @throws Error when there is no such building */
export async function requireBuildingPlan(
  tx: Tx,
  { buildingId }: { buildingId: number },
): Promise<BuildingPlan> {
  const plan = await getBuildingPlan(tx, { buildingId })
  if (!plan) throw new Error(`there is no building ${buildingId}`)
  return plan
}

/** Id, slug and zone of every building, oldest first. */
export function listBuildings(tx: Tx) {
  return tx
    .select({
      id: buildings.id,
      organizationId: buildings.organizationId,
      slug: buildings.slug,
      timeZone: buildings.timeZone,
    })
    .from(buildings)
    .orderBy(buildings.id)
}

/** Supply states of a building's air handlers that hold between two instants: those inside, and each handler's last one before. */
export async function supplyStatesBetween(
  tx: Tx,
  { buildingId, from, to }: { buildingId: number; from: Date; to: Date },
): Promise<(typeof supplyStates.$inferSelect)[]> {
  const before = await tx
    .selectDistinctOn([supplyStates.airHandlerId])
    .from(supplyStates)
    .where(and(eq(supplyStates.buildingId, buildingId), lt(supplyStates.at, from)))
    .orderBy(supplyStates.airHandlerId, sql`${supplyStates.at} DESC`)
  const inside = await tx
    .select()
    .from(supplyStates)
    .where(and(eq(supplyStates.buildingId, buildingId), gte(supplyStates.at, from), lte(supplyStates.at, to)))
    .orderBy(supplyStates.airHandlerId, supplyStates.at)
  return [...before, ...inside]
}

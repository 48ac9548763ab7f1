import { eq, min } from 'drizzle-orm'
import { notifyLive } from '@/db/changes/notice'
import type { Tx } from '@/db/client'
import { newPublicId } from '@/db/public-id'
import {
  airHandlers,
  buildings,
  closures,
  floors,
  hours,
  organizations,
  placements,
  sensors,
  tenancies,
} from '@/db/schema'
import type { World } from '../world'
import { byKey, type Here, insertRooms, insertSensors, secretHash } from './rooms'

/** The demo building's rows; `sensorIds` in the order of the plan's sensors. */
export type DemoIds = {
  organizationId: number
  buildingId: number
  /** the plan's tenancy key ("weir", "cardroom", "bobbin", "skein") to tenancies.id */
  tenancyIds: Record<string, number>
  /** null where a person has retired the sensor since */
  sensorIds: (number | null)[]
}

/** The building of the plan if it stands already, with the start of its history (epoch seconds). */
export async function findDemo(
  tx: Tx,
  slug: string,
): Promise<{ organizationId: number; buildingId: number; historyStartS: number } | undefined> {
  const [found] = await tx
    .select({
      organizationId: buildings.organizationId,
      buildingId: buildings.id,
      isDemo: organizations.isDemo,
    })
    .from(buildings)
    .innerJoin(organizations, eq(organizations.id, buildings.organizationId))
    .where(eq(buildings.slug, slug))
  if (!found) return undefined
  if (!found.isDemo)
    throw new Error(`the slug ${slug} belongs to a building that is no demo: start with --no-demo`)
  const [first] = await tx
    .select({ at: min(placements.fromAt) })
    .from(placements)
    .where(eq(placements.buildingId, found.buildingId))
  if (!first?.at) throw new Error(`the demo building ${slug} has no sensors; remove its organisation`)
  return { ...found, historyStartS: first.at.getTime() / 1000 }
}

/** Builds organisation, building, floors, plant, tenancies, rooms and sensors in the running transaction: all or nothing. */
export async function buildDemo(tx: Tx, world: World, key: string): Promise<DemoIds> {
  const { scenario } = world
  const start = new Date(world.historyStartS * 1000)
  const organizationId = await insertOrganization(tx, world, start)
  const { openFrom, openTo, ...plain } = scenario.building
  const [building] = await tx
    .insert(buildings)
    .values({ organizationId, ...plain, createdAt: start })
    .returning({ id: buildings.id })
  const here = { organizationId, buildingId: building!.id }
  const floorIds = byKey(
    scenario.floors.map((f) => f.key),
    await tx
      .insert(floors)
      .values(scenario.floors.map(({ name, ordinal }) => ({ ...here, name, ordinal })))
      .returning({ id: floors.id }),
  )
  const handlerIds = await insertAirHandlers(tx, world, here)
  const tenancyIds = await insertTenancies(tx, world, here, start)
  await tx
    .insert(hours)
    .values({ ...here, purpose: 'occupied', days: [1, 2, 3, 4, 5], fromLocal: openFrom, toLocal: openTo })
  await tx
    .insert(closures)
    .values(scenario.closures(world.local.at(world.firstStartS).day).map((c) => ({ ...here, ...c })))
  const roomIds = await insertRooms(tx, world, here, { floorIds, handlerIds, tenancyIds }, start)
  const sensorIds = await insertSensors(tx, world, here, roomIds, key, start)
  return { ...here, tenancyIds, sensorIds }
}

async function insertOrganization(tx: Tx, world: World, start: Date): Promise<number> {
  const { name } = world.scenario.organization
  const [row] = await tx
    .insert(organizations)
    .values({ publicId: newPublicId(), name, isDemo: true, createdAt: start })
    .returning({ id: organizations.id })
  return row!.id
}

async function insertAirHandlers(tx: Tx, world: World, here: Here): Promise<Record<string, number>> {
  const plans = world.scenario.airHandlers
  // the outdoor share of a return-air handler is left unsaid, as it mostly is: its rooms show a dilution rate
  const rows = await tx
    .insert(airHandlers)
    .values(plans.map(({ code, name, airSystem }) => ({ ...here, code, name, airSystem })))
    .returning({ id: airHandlers.id })
  const ids = byKey(
    plans.map((plan) => plan.code),
    rows,
  )
  await tx.insert(hours).values(
    plans.flatMap((plan) =>
      plan.hours.map((h) => ({
        ...here,
        purpose: 'supply' as const,
        airHandlerId: ids[plan.code]!,
        days: [...h.days],
        fromLocal: h.from,
        toLocal: h.to,
      })),
    ),
  )
  return ids
}

async function insertTenancies(
  tx: Tx,
  world: World,
  here: Here,
  start: Date,
): Promise<Record<string, number>> {
  const plans = world.scenario.tenancies
  const rows = await tx
    .insert(tenancies)
    .values(
      plans.map(({ name, digestEmails }) => ({
        ...here,
        publicId: newPublicId(),
        name,
        digestEmails: [...digestEmails],
        createdAt: start,
      })),
    )
    .returning({ id: tenancies.id })
  const ids = byKey(
    plans.map((plan) => plan.key),
    rows,
  )
  await tx.insert(hours).values(
    plans.flatMap((plan) =>
      plan.hours.map((h) => ({
        ...here,
        purpose: 'occupied' as const,
        tenancyId: ids[plan.key]!,
        days: [...h.days],
        fromLocal: h.from,
        toLocal: h.to,
      })),
    ),
  )
  return ids
}

/** The rows of a demo that stands already; its sensors get the secrets of this data folder's key (a new folder has a new key). */
export async function adoptDemo(tx: Tx, world: World, here: Here, key: string): Promise<DemoIds> {
  const tenancyRows = await tx
    .select({ id: tenancies.id })
    .from(tenancies)
    .where(eq(tenancies.buildingId, here.buildingId))
    .orderBy(tenancies.id)
  const sensorRows = await tx
    .select({
      id: sensors.id,
      deviceId: sensors.deviceId,
      secretSha256: sensors.secretSha256,
      retiredAt: sensors.retiredAt,
    })
    .from(sensors)
    .where(eq(sensors.buildingId, here.buildingId))
  const plans = world.scenario.sensors
  const own = plans.map(({ deviceId }) => sensorRows.find((row) => row.deviceId === deviceId))
  const changed = own.filter((row) => row && row.secretSha256 !== secretHash(key, row.deviceId))
  for (const row of changed) {
    const secretSha256 = secretHash(key, row!.deviceId)
    await tx.update(sensors).set({ secretSha256 }).where(eq(sensors.id, row!.id))
  }
  if (changed.length > 0) await notifyLive(tx, 'sensors', [here.buildingId])
  const keys = world.scenario.tenancies.map((plan) => plan.key)
  return {
    organizationId: here.organizationId,
    buildingId: here.buildingId,
    tenancyIds: byKey(keys, tenancyRows), // made in the plan's order; names may have been changed since
    sensorIds: own.map((row) => (row && row.retiredAt === null ? row.id : null)),
  }
}

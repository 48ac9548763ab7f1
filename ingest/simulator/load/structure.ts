import { createHash } from 'node:crypto'
import { eq, min } from 'drizzle-orm'
import type { Tx } from '@/db/client'
import { newPublicId } from '@/db/public-id'
import {
  airHandlers,
  bases,
  buildings,
  closures,
  floors,
  hours,
  organizations,
  placements,
  roomDesigns,
  rooms,
  roomTenancies,
  sensors,
  tenancies,
} from '@/db/schema'
import { deviceIdKey } from '@/lib/wire/topics'
import { sensorSecret } from '../demo-files'
import { dateOf } from '../local-time'
import type { CorridorPlan, RoomPlan } from '../scenario'
import type { World } from '../world'

/** The demo building's rows; `sensorIds` in the order of the plan's sensors. */
export type DemoIds = {
  organizationId: number
  buildingId: number
  /** the plan's tenancy key ("weir", "cardroom", "bobbin", "skein") to tenancies.id */
  tenancyIds: Record<string, number>
  /** null where a person has retired the sensor since */
  sensorIds: (number | null)[]
}

const YEAR_S = 365 * 86400

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

type Here = { organizationId: number; buildingId: number }

function byKey(keys: readonly string[], rows: readonly { id: number }[]): Record<string, number> {
  return Object.fromEntries(keys.map((key, i) => [key, rows[i]!.id]))
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

type Keys = {
  floorIds: Record<string, number>
  handlerIds: Record<string, number>
  tenancyIds: Record<string, number>
}

async function insertRooms(
  tx: Tx,
  world: World,
  here: Here,
  keys: Keys,
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
  keys: Keys,
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

const secretHash = (key: string, deviceId: string) =>
  createHash('sha256').update(sensorSecret(key, deviceId)).digest('hex')

async function insertSensors(
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
  for (const row of own) {
    if (!row) continue
    const secretSha256 = secretHash(key, row.deviceId)
    if (row.secretSha256 !== secretSha256)
      await tx.update(sensors).set({ secretSha256 }).where(eq(sensors.id, row.id))
  }
  const keys = world.scenario.tenancies.map((plan) => plan.key)
  return {
    organizationId: here.organizationId,
    buildingId: here.buildingId,
    tenancyIds: byKey(keys, tenancyRows), // made in the plan's order; names may have been changed since
    sensorIds: own.map((row) => (row && row.retiredAt === null ? row.id : null)),
  }
}

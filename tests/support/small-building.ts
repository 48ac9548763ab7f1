import { sql } from 'drizzle-orm'
import { putPerson } from '@/db/changes/people'
import type { Database, Tx } from '@/db/client'
import { newPublicId } from '@/db/public-id'
import * as schema from '@/db/schema'
import type { Role } from '@/lib/policy/roles'
import { hashPassword } from '@/lib/server/auth/password'

/** All people of these tests share it. */
export const SMALL_PASSWORD = 'a password of the tests only'

/** When the first tenancy of the shared room ended and the second began. */
export const HANDED_OVER = new Date('2026-05-11T00:00:00Z')

const BEGAN = new Date('2026-01-01T00:00:00Z')

export type SmallRoom = { id: number; publicId: string; sensorId: number; deviceId: string }

export type SmallOrganization = {
  organizationId: number
  buildingId: number
  tenancies: { weir: { id: number; publicId: string }; loom: { id: number; publicId: string } }
  /** `hall` is held by weir; `desk` is weir's single-person room; `studio` went from loom to weir; `spare` is nobody's */
  rooms: { hall: SmallRoom; desk: SmallRoom; studio: SmallRoom; spare: SmallRoom }
  people: Record<Role | 'duty', string>
}

/**
 * An organisation with one building of four rooms, each with a sensor whose readings stand at noon of 10 and 12 May 2026 (before and
 * after the studio changed hands), and one person a role plus one who is operator and engineer. `prefix` keeps several apart.
 */
export async function makeSmallOrganization(database: Database, prefix: string): Promise<SmallOrganization> {
  const passwordHash = await hashPassword(SMALL_PASSWORD)
  return database.asSystem('test: small organisation', async (tx) => {
    await tx.execute(sql`SELECT ensure_readings_month('2026-05-01T00:00:00Z')`)
    const organizationId = await one(tx, schema.organizations, {
      publicId: newPublicId(),
      name: `${prefix} estates`,
    })
    const buildingId = await one(tx, schema.buildings, {
      organizationId,
      slug: prefix,
      name: `${prefix} works`,
      timeZone: 'Europe/Lisbon',
    })
    const place = { organizationId, buildingId }
    const tenancies = {
      weir: await addTenancy(tx, place, 'Weir'),
      loom: await addTenancy(tx, place, 'Loom'),
    }
    const rooms = await addRooms(tx, place, prefix)
    const { weir, loom } = tenancies
    await hold(tx, organizationId, rooms.hall.id, weir.id, BEGAN, null)
    await hold(tx, organizationId, rooms.desk.id, weir.id, BEGAN, null)
    await hold(tx, organizationId, rooms.studio.id, loom.id, BEGAN, HANDED_OVER)
    await hold(tx, organizationId, rooms.studio.id, weir.id, HANDED_OVER, null)
    const people = await addPeople(tx, organizationId, weir.id, prefix, passwordHash)
    return { ...place, tenancies, rooms, people }
  })
}

type Place = { organizationId: number; buildingId: number }

// biome-ignore lint/suspicious/noExplicitAny: any table of the schema with an identity `id`
async function one(tx: Tx, table: any, values: Record<string, unknown>): Promise<number> {
  const [row] = (await tx.insert(table).values(values).returning({ id: table.id })) as { id: number }[]
  if (!row) throw new Error('not inserted')
  return row.id
}

async function addTenancy(tx: Tx, place: Place, name: string): Promise<{ id: number; publicId: string }> {
  const publicId = newPublicId()
  const id = await one(tx, schema.tenancies, { ...place, publicId, name, digestEmails: [] })
  return { id, publicId }
}

async function addRooms(tx: Tx, place: Place, prefix: string): Promise<SmallOrganization['rooms']> {
  const floorId = await one(tx, schema.floors, { ...place, name: 'Ground floor', ordinal: 0 })
  const room = (number: string, name: string, singlePerson = false) =>
    addRoom(tx, place, { floorId, number, name, singlePerson, deviceId: `${prefix}-${number}` })
  return {
    hall: await room('0.01', 'Hall'),
    desk: await room('0.02', 'Desk', true),
    studio: await room('0.03', 'Studio'),
    spare: await room('0.04', 'Spare'),
  }
}

type NewRoom = { floorId: number; number: string; name: string; singlePerson: boolean; deviceId: string }

async function addRoom(tx: Tx, place: Place, { deviceId, ...values }: NewRoom): Promise<SmallRoom> {
  const publicId = newPublicId()
  const id = await one(tx, schema.rooms, { ...place, publicId, use: 'office', ...values })
  const { organizationId } = place
  await tx.insert(schema.roomDesigns).values({
    organizationId,
    roomId: id,
    validFrom: '2026-01-01',
    volumeM3: 120,
    floorAreaM2: 40,
    designHeadcount: 8,
  })
  const sensorId = await one(tx, schema.sensors, {
    ...place,
    deviceId,
    deviceIdKey: deviceId.toLowerCase(),
    label: deviceId,
    secretSha256: 'none',
  })
  await tx
    .insert(schema.placements)
    .values({ ...place, sensorId, roomId: id, position: 'room', lead: true, fromAt: BEGAN })
  const noon = (day: number) => new Date(`2026-05-${day}T12:00:00Z`)
  await tx
    .insert(schema.readings)
    .values([10, 12].map((day) => ({ sensorId, at: noon(day), co2Ppm: 600 + day })))
  await tx.insert(schema.latestReadings).values({ sensorId, at: noon(12), receivedAt: noon(12), co2Ppm: 612 })
  return { id, publicId, sensorId, deviceId }
}

async function hold(
  tx: Tx,
  organizationId: number,
  roomId: number,
  tenancyId: number,
  fromAt: Date,
  toAt: Date | null,
): Promise<void> {
  await tx.insert(schema.roomTenancies).values({ organizationId, roomId, tenancyId, fromAt, toAt })
}

async function addPeople(
  tx: Tx,
  organizationId: number,
  tenancyId: number,
  prefix: string,
  passwordHash: string,
): Promise<SmallOrganization['people']> {
  const add = async (word: string, roles: Role[]) => {
    const email = `${word}@${prefix}.example`
    const restricted = roles.includes('tenant') ? tenancyId : null
    await putPerson(
      tx,
      { organizationId, email, name: word, passwordHash, roles, buildingIds: null, tenancyId: restricted },
      null,
    )
    return email
  }
  return {
    administrator: await add('administrator', ['administrator']),
    operator: await add('operator', ['operator']),
    engineer: await add('engineer', ['engineer']),
    installer: await add('installer', ['installer']),
    tenant: await add('tenant', ['tenant']),
    duty: await add('duty', ['operator', 'engineer']),
  }
}

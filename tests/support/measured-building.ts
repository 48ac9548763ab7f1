import { sql } from 'drizzle-orm'
import type { Database, Tx } from '@/db/client'
import { newPublicId } from '@/db/public-id'
import * as schema from '@/db/schema'
import { seededRandom } from '@/lib/math/seeded'
import { addDays, isoWeekday, localToEpochS } from '@/lib/time'

/** A day in a room: people come and go and the supply runs between building-local wall times. */
export type RoomDayPlan = { peopleFrom: string; peopleTo: string; persons: number; nextDay?: boolean }

export type MeasuredRoom = {
  number: string
  name: string
  volumeM3: number
  /** true rate with the supply on and off, 1/h */
  rateOnPerHour: number
  rateOffPerHour: number
  designHeadcount: number
  dayPlan?: RoomDayPlan
}

export type MeasuredBuilding = {
  organizationId: number
  buildingId: number
  timeZone: string
  airHandlerId: number
  tenancyId: number
  rooms: (MeasuredRoom & { id: number; publicId: string; sensorId: number })[]
}

const GENERATION_LPS = 0.0052
const OUTDOOR_PPM = 430
const BEGAN = new Date('2025-01-01T00:00:00Z')
const WEEKDAYS = [1, 2, 3, 4, 5]
const office: RoomDayPlan = { peopleFrom: '09:00', peopleTo: '17:00', persons: 12 }

export const threeRooms: readonly MeasuredRoom[] = [
  { number: '1.01', name: 'Alder', volumeM3: 80, rateOnPerHour: 3, rateOffPerHour: 0.3, designHeadcount: 4 },
  {
    number: '1.02',
    name: 'Birch',
    volumeM3: 120,
    rateOnPerHour: 2.2,
    rateOffPerHour: 0.25,
    designHeadcount: 16,
  },
  {
    number: '1.03',
    name: 'Cedar',
    volumeM3: 90,
    rateOnPerHour: 1.2,
    rateOffPerHour: 0.3,
    designHeadcount: 2,
  },
]

type Place = { organizationId: number; buildingId: number }

// biome-ignore lint/suspicious/noExplicitAny: any table of the schema with an identity `id`
async function one(tx: Tx, table: any, values: Record<string, unknown>): Promise<number> {
  const [row] = (await tx.insert(table).values(values).returning({ id: table.id })) as { id: number }[]
  return row!.id
}

async function addRoom(
  tx: Tx,
  place: Place,
  room: MeasuredRoom,
  ids: { floorId: number; airHandlerId: number; basisId: number },
  slug: string,
) {
  const publicId = newPublicId()
  const { number, name } = room
  const id = await one(tx, schema.rooms, { ...place, ...ids, publicId, number, name, use: 'meeting room' })
  await tx.insert(schema.roomDesigns).values({
    organizationId: place.organizationId,
    roomId: id,
    validFrom: '2025-01-01',
    volumeM3: room.volumeM3,
    floorAreaM2: room.volumeM3 / 3,
    designHeadcount: room.designHeadcount,
    permittedOccupancy: 40,
  })
  const deviceId = `${slug}-${number}`
  const sensorId = await one(tx, schema.sensors, {
    ...{ ...place, deviceId, deviceIdKey: deviceId, label: `${name}, wall`, secretSha256: 'none' },
    ...{ accuracyPpm: 30, accuracyPct: 3, resolutionPpm: 1, rangeMaxPpm: 5000 },
  })
  await tx
    .insert(schema.placements)
    .values({ ...place, sensorId, roomId: id, position: 'room', lead: true, fromAt: BEGAN })
  return { ...room, id, publicId, sensorId }
}

/** A building with one air handler (outdoor air only, 07:00 to 19:00 on weekdays), one tenancy and some rooms; no readings yet. */
export async function makeMeasuredBuilding(
  database: Database,
  options: {
    slug: string
    timeZone: string
    rooms?: readonly MeasuredRoom[]
    emails?: string[]
    supply?: [string, string]
  },
): Promise<MeasuredBuilding> {
  const { slug, timeZone, rooms = threeRooms, emails = [], supply = ['07:00', '19:00'] } = options
  return database.asSystem('test: measured building', async (tx) => {
    const organizationId = await one(tx, schema.organizations, { publicId: newPublicId(), name: slug })
    const buildingId = await one(tx, schema.buildings, {
      organizationId,
      slug,
      name: `${slug} house`,
      timeZone,
    })
    const place = { organizationId, buildingId }
    const floorId = await one(tx, schema.floors, { ...place, name: 'First floor', ordinal: 1 })
    const airHandlerId = await one(tx, schema.airHandlers, {
      ...place,
      code: 'AH-1',
      name: 'First floor supply',
      airSystem: 'outdoor',
    })
    const basisId = await one(tx, schema.bases, {
      organizationId,
      name: 'Agreed flow',
      kind: 'per-person',
      flowLpsPerPerson: 7,
      flowLpsPerM2: 0.7,
    })
    const week = { ...place, days: WEEKDAYS }
    await tx.insert(schema.hours).values([
      { ...week, purpose: 'supply', airHandlerId, fromLocal: supply[0], toLocal: supply[1] },
      { ...week, purpose: 'occupied', fromLocal: '08:00', toLocal: '18:00' },
    ])
    const tenancyId = await one(tx, schema.tenancies, {
      ...place,
      publicId: newPublicId(),
      name: 'Weir Learning',
      digestEmails: emails,
    })
    const added: MeasuredBuilding['rooms'] = []
    for (const room of rooms) {
      const row = await addRoom(tx, place, room, { floorId, airHandlerId, basisId }, slug)
      await tx
        .insert(schema.roomTenancies)
        .values({ organizationId, roomId: row.id, tenancyId, fromAt: BEGAN })
      added.push(row)
    }
    return { ...place, timeZone, airHandlerId, tenancyId, rooms: added }
  })
}

type Period = { fromS: number; toS: number }

function periods(
  dates: readonly string[],
  timeZone: string,
  from: string,
  to: string,
  toNextDay = false,
): Period[] {
  return dates.map((date) => ({
    fromS: localToEpochS(date, from, timeZone),
    toS: localToEpochS(toNextDay ? addDays(date, 1) : date, to, timeZone),
  }))
}

const inside = (list: readonly Period[], t: number) => list.some((one) => t >= one.fromS && t < one.toS)

export type Sample = { sensorId: number; atS: number; co2Ppm: number }

/**
 * Minute readings of every room over some local dates, from the exact mass balance of one well-mixed zone, with 2 ppm of seeded noise and
 * 1 ppm of resolution. People and supply on weekdays only unless `everyDay`.
 */
export function samplesOf(
  building: MeasuredBuilding,
  dates: readonly string[],
  options: { seed?: number; everyDay?: boolean; supply?: [string, string]; untilS?: number } = {},
): Sample[] {
  const { timeZone } = building
  const [supplyFrom, supplyTo] = options.supply ?? ['07:00', '19:00']
  const active = dates.filter((date) => options.everyDay || isoWeekday(date) <= 5)
  const supply = periods(active, timeZone, supplyFrom, supplyTo === '24:00' ? '23:59:59' : supplyTo)
  const startS = localToEpochS(dates[0]!, '00:00', timeZone) - 7200
  const endS = Math.min(
    options.untilS ?? Number.POSITIVE_INFINITY,
    localToEpochS(addDays(dates.at(-1)!, 1), '12:00', timeZone),
  )
  return building.rooms.flatMap((room, index) => {
    const random = seededRandom((options.seed ?? 1) * 1000 + index)
    const plan = room.dayPlan ?? office
    const people = periods(active, timeZone, plan.peopleFrom, plan.peopleTo, plan.nextDay)
    let co2Ppm = OUTDOOR_PPM + 20
    const samples: Sample[] = []
    for (let t = startS; t < endS; t += 60) {
      const rate = inside(supply, t) ? room.rateOnPerHour : room.rateOffPerHour
      const sourceLps = inside(people, t) ? plan.persons * GENERATION_LPS : 0
      const steady = OUTDOOR_PPM + (1e6 * sourceLps * 3.6) / (rate * room.volumeM3)
      co2Ppm = steady + (co2Ppm - steady) * Math.exp(-rate / 60)
      samples.push({ sensorId: room.sensorId, atS: t + 60, co2Ppm: Math.round(co2Ppm + 2 * random.normal()) })
    }
    return samples
  })
}

/** Stores readings as if each had arrived at once; the months are made as needed. */
export async function storeSamples(database: Database, samples: readonly Sample[]): Promise<void> {
  await database.asSystem('test: readings', async (tx) => {
    const instants = samples.map((sample) => sample.atS)
    await tx.execute(
      sql`SELECT ensure_readings_month(m) FROM generate_series(date_trunc('month', to_timestamp(${Math.min(...instants)}), 'UTC'), to_timestamp(${Math.max(...instants)}), interval '1 month') m`,
    )
    const column = (values: readonly number[]) => `{${values.join(',')}}`
    await tx.execute(sql`INSERT INTO readings (sensor_id, at, received_at, co2_ppm)
      SELECT s, to_timestamp(t), to_timestamp(t), c
      FROM unnest(${column(samples.map((one) => one.sensorId))}::int[], ${column(instants)}::float8[], ${column(samples.map((one) => one.co2Ppm))}::real[]) AS i(s, t, c)
      ON CONFLICT DO NOTHING`)
    await tx.execute(sql`INSERT INTO latest_readings (sensor_id, at, received_at, co2_ppm)
      SELECT DISTINCT ON (sensor_id) sensor_id, at, received_at, co2_ppm FROM readings ORDER BY sensor_id, at DESC
      ON CONFLICT (sensor_id) DO UPDATE SET at = excluded.at, received_at = excluded.received_at, co2_ppm = excluded.co2_ppm`)
  })
}

/** All dates from one to another, both included. */
export function dates(from: string, to: string): string[] {
  const list: string[] = []
  for (let date = from; date <= to; date = addDays(date, 1)) list.push(date)
  return list
}

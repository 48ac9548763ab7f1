import { and, eq, isNull, sql } from 'drizzle-orm'
import { Refusal } from '@/lib/errors'
import type { SensorForm } from '@/lib/forms/sensor'
import { deviceIdKey } from '@/lib/wire/topics'
import type { Tx } from '../client'
import { deviceSecretSha256, newDeviceSecret } from '../device-secret'
import { placements, rooms, sensors } from '../schema'
import { addAuditEvent } from './audit'
import { notifyLive } from './notice'

type Actor = { organizationId: number; userId: number }

/**
 * Registers a sensor and places it from `now` on; answers its secret, this once. Refuses a device id that is taken anywhere in the
 * deployment without saying whose it is. A lead sensor takes over from the room's earlier one.
 */
export async function registerSensor(
  tx: Tx,
  actor: Actor,
  { buildingId, form, now }: { buildingId: number; form: SensorForm; now: Date },
): Promise<{ deviceId: string; secret: string }> {
  const secret = newDeviceSecret()
  // a reading without a time counts to the second, and device clocks lag a little: the place begins with the minute
  const fromAt = new Date(Math.floor(now.getTime() / 60_000) * 60_000)
  const roomId = form.roomId === undefined ? null : await requireRoom(tx, buildingId, form.roomId)
  const key = deviceIdKey(form.deviceId)
  const [sensor] = await tx
    .insert(sensors)
    .values({
      organizationId: actor.organizationId,
      buildingId,
      deviceId: form.deviceId,
      deviceIdKey: key,
      label: form.label,
      secretSha256: deviceSecretSha256(secret),
      intervalS: form.intervalS,
      reporting: form.reporting,
      deadbandPpm: form.deadbandPpm,
      accuracyPpm: form.accuracyPpm,
      accuracyPct: form.accuracyPct,
      resolutionPpm: form.resolutionPpm,
      rangeMaxPpm: form.rangeMaxPpm,
      registeredBy: actor.userId,
      createdAt: now,
    })
    .onConflictDoNothing({ target: sensors.deviceIdKey })
    .returning({ id: sensors.id })
  if (!sensor) {
    throw new Refusal(
      'conflict',
      `${form.deviceId} cannot be registered here. Check the id on the sensor; if it is right, ask your administrator.`,
      {
        fields: { deviceId: ['This device id cannot be registered here.'] },
      },
    )
  }
  const lead = form.lead && roomId !== null && form.position === 'room'
  if (lead) await endEarlierLead(tx, roomId, fromAt)
  await tx.insert(placements).values({
    organizationId: actor.organizationId,
    buildingId,
    sensorId: sensor.id,
    roomId,
    position: form.position,
    lead,
    fromAt,
  })
  await addAuditEvent(tx, {
    ...actor,
    action: 'sensor.registered',
    subjectKind: 'sensor',
    subjectId: form.deviceId,
    detail: {
      to: {
        label: form.label,
        position: form.position,
        room: form.roomId ?? null,
        lead,
        intervalS: form.intervalS,
      },
    },
  })
  await notifyLive(tx, 'sensors', [buildingId])
  return { deviceId: form.deviceId, secret }
}

/** The room's lead so far stays where it hangs, but no longer leads; what it led until now is kept. */
async function endEarlierLead(tx: Tx, roomId: number, at: Date): Promise<void> {
  const [earlier] = await tx
    .update(placements)
    .set({ toAt: sql`greatest(${placements.fromAt}, ${at.toISOString()}::timestamptz)` })
    .where(and(eq(placements.roomId, roomId), eq(placements.lead, true), isNull(placements.toAt)))
    .returning()
  if (!earlier) return
  const { organizationId, buildingId, sensorId, position } = earlier
  await tx.insert(placements).values({
    organizationId,
    buildingId,
    sensorId,
    roomId,
    position,
    lead: false,
    fromAt: earlier.toAt ?? at,
  })
}

async function requireRoom(tx: Tx, buildingId: number, publicId: string): Promise<number> {
  const [room] = await tx
    .select({ id: rooms.id })
    .from(rooms)
    .where(and(eq(rooms.publicId, publicId), eq(rooms.buildingId, buildingId)))
  if (!room)
    throw new Refusal('invalid', 'That room is not in this building.', {
      fields: { roomId: ['Choose a room of this building.'] },
    })
  return room.id
}

/** A new secret for a sensor whose old one was lost; the old one stops working at once. */
export async function renewSecret(
  tx: Tx,
  actor: Actor,
  { deviceId }: { deviceId: string },
): Promise<{ deviceId: string; secret: string }> {
  const secret = newDeviceSecret()
  const [sensor] = await tx
    .update(sensors)
    .set({ secretSha256: deviceSecretSha256(secret) })
    .where(and(eq(sensors.deviceIdKey, deviceIdKey(deviceId)), isNull(sensors.retiredAt)))
    .returning({ deviceId: sensors.deviceId, buildingId: sensors.buildingId })
  if (!sensor)
    throw new Refusal('not-found', 'There is no such sensor, or it is retired or not yours to change.')
  await addAuditEvent(tx, {
    ...actor,
    action: 'sensor.secret-renewed',
    subjectKind: 'sensor',
    subjectId: sensor.deviceId,
    detail: {},
  })
  await notifyLive(tx, 'sensors', [sensor.buildingId])
  return { deviceId: sensor.deviceId, secret }
}

/** Retires a sensor: its placement ends now, its record stays, its secret stops working. */
export async function retireSensor(
  tx: Tx,
  actor: Actor,
  { deviceId, now }: { deviceId: string; now: Date },
): Promise<void> {
  const [sensor] = await tx
    .update(sensors)
    .set({ retiredAt: now })
    .where(and(eq(sensors.deviceIdKey, deviceIdKey(deviceId)), isNull(sensors.retiredAt)))
    .returning({ id: sensors.id, deviceId: sensors.deviceId, buildingId: sensors.buildingId })
  if (!sensor)
    throw new Refusal(
      'not-found',
      'There is no such sensor, or it is retired already or not yours to change.',
    )
  await tx
    .update(placements)
    .set({ toAt: sql`greatest(${placements.fromAt}, ${now.toISOString()}::timestamptz)` })
    .where(and(eq(placements.sensorId, sensor.id), isNull(placements.toAt)))
  await addAuditEvent(tx, {
    ...actor,
    action: 'sensor.retired',
    subjectKind: 'sensor',
    subjectId: sensor.deviceId,
    detail: {},
  })
  await notifyLive(tx, 'sensors', [sensor.buildingId])
}

import { and, eq, inArray, isNotNull, isNull, notInArray } from 'drizzle-orm'
import type { Tx } from '../client'
import { sensors } from '../schema'

export type SuspectSensor = { sensorId: number; since: Date; reason: string }

/**
 * Marks the sensors that the nights speak against and clears the rest of the building. A sensor that stays suspect keeps the date it
 * became so.
 */
export async function markSuspects(
  tx: Tx,
  { buildingId, suspects }: { buildingId: number; suspects: readonly SuspectSensor[] },
): Promise<void> {
  const ids = suspects.map((one) => one.sensorId)
  await tx
    .update(sensors)
    .set({ suspectSince: null, suspectReason: null })
    .where(
      and(eq(sensors.buildingId, buildingId), isNotNull(sensors.suspectSince), notInArray(sensors.id, ids)),
    )
  for (const { sensorId, since, reason } of suspects) {
    await tx
      .update(sensors)
      .set({ suspectSince: since })
      .where(and(eq(sensors.id, sensorId), isNull(sensors.suspectSince)))
    await tx
      .update(sensors)
      .set({ suspectReason: reason })
      .where(inArray(sensors.id, [sensorId]))
  }
}

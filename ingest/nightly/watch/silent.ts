import { storeFindings } from '@/db/changes/findings'
import { notifyLive } from '@/db/changes/notice'
import type { Database } from '@/db/client'
import { type BuildingPlan, requireBuildingPlan } from '@/db/queries/building-plan'
import { lastHeard } from '@/db/queries/weeks'
import { METHOD_VERSION } from '@/lib/air/decay/version'
import { nightsBetween } from '@/lib/air/nights'
import { silentAfterS } from '@/lib/air/room-state'
import type { Clock } from '@/lib/server/clock'
import { localClock, localDate } from '@/lib/time'

/** A sensor that was away for less is a matter of the live board, not of a finding. */
const LEAST_SILENCE_S = 3600

type SilentSensor = { sensor: BuildingPlan['sensors'][number]; roomId: number | null; sinceS: number }

/** Placed sensors that spoke before and have been quiet for longer than their interval allows, and for an hour at least. */
export function silentSensors(
  plan: BuildingPlan,
  heard: readonly { sensorId: number; at: Date }[],
  nowS: number,
): SilentSensor[] {
  return plan.placements.flatMap((placement) => {
    const sensor = plan.sensors.find((one) => one.id === placement.sensorId)
    const last = heard.find((one) => one.sensorId === placement.sensorId)
    if (placement.toAt !== null || !sensor || sensor.retiredAt !== null || !last) return []
    const sinceS = last.at.getTime() / 1000
    const allowedS = Math.max(LEAST_SILENCE_S, silentAfterS(sensor.intervalS))
    return nowS - sinceS > allowedS ? [{ sensor, roomId: placement.roomId, sinceS }] : []
  })
}

/** Makes the findings "sensor silent" hold exactly the sensors that are silent now. A sensor that speaks again is no finding any more. */
export async function watchSensors(options: {
  database: Database
  clock: Clock
  buildingId: number
}): Promise<void> {
  const { database, clock, buildingId } = options
  const now = clock.now()
  const nowS = now.getTime() / 1000
  await database.asSystem('watch sensors', async (tx) => {
    const plan = await requireBuildingPlan(tx, { buildingId })
    const { organizationId, timeZone } = plan.building
    const silent = silentSensors(plan, await lastHeard(tx, { buildingId }), nowS)
    const today = localDate(nowS, timeZone)
    const findings = silent.map(({ sensor, roomId, sinceS }) => {
      const firstNight = localDate(sinceS, timeZone)
      return {
        ...{ organizationId, buildingId, roomId, airHandlerId: null, methodVersion: METHOD_VERSION },
        kind: 'sensor silent' as const,
        subjectKey: `sensor ${sensor.id}`,
        ...{ firstNight, lastNight: today, nights: nightsBetween(firstNight, today) + 1 },
        detail: { sensorId: sensor.id, lastHeardAt: new Date(sinceS * 1000).toISOString() },
        sentence: `The sensor ${sensor.label} has sent nothing since ${localClock(sinceS, timeZone)} on ${firstNight}.`,
      }
    })
    const ids = { buildingId, methodVersion: METHOD_VERSION, now }
    const changed = await storeFindings(tx, { ...ids, kinds: ['sensor silent'], findings })
    if (changed > 0) await notifyLive(tx, 'sensors', [buildingId])
  })
}

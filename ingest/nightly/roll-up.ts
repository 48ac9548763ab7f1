import { type Rolled, rollForward, rollLateHours } from '@/db/changes/rollups'
import type { Database } from '@/db/client'
import { listKeptPeriods } from '@/db/queries/retention'
import type { Clock } from '@/lib/server/clock'
import { keptSince } from './retention/policy'

export type RollUpOptions = {
  database: Database
  clock: Clock
  /** days of readings that the deployment keeps where an organisation says nothing; null keeps all */
  readingsKeptDays: number | null
  stopped?: () => boolean
}

/**
 * Rolls up what came in since the last time and what came late, of every building: never in the transaction that takes readings. Each
 * step is a transaction; ended early, the next run goes on from there. Returns rows written.
 */
export async function rollUp({ database, clock, readingsKeptDays, stopped }: RollUpOptions): Promise<number> {
  const buildings = await database.asSystem('roll up', (tx) => listKeptPeriods(tx))
  let written = 0
  for (const building of buildings) {
    const { buildingId } = building
    const since = keptSince(clock.now(), building.readingsKeptDays ?? readingsKeptDays)
    const steps = [
      () =>
        database.asSystemRaw('roll up', (client) => rollForward(client, { buildingId, now: clock.now() })),
      () =>
        database.asSystemRaw('roll up', (client) => rollLateHours(client, { buildingId, keptSince: since })),
    ]
    for (const step of steps) written += await toTheEnd(step, stopped)
    if (stopped?.()) break
  }
  return written
}

async function toTheEnd(step: () => Promise<Rolled>, stopped?: () => boolean): Promise<number> {
  let written = 0
  for (let more = true; more && !stopped?.(); ) {
    const rolled = await step()
    written += rolled.written
    more = rolled.more
  }
  return written
}

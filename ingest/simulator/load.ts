import path from 'node:path'
import { sql } from 'drizzle-orm'
import type { Database } from '@/db/client'
import {
  DEMO_SEED,
  type DemoBirth,
  demoKey,
  keepState,
  readBirth,
  readState,
  writeBirth,
  writeTruth,
} from './demo-files'
import { type HistoryBatch, makeHistory } from './history'
import { type Arrival, ensureMonths, recordedUntil, storeBatch } from './load/bulk'
import { adoptDemo, buildDemo, type DemoIds, findDemo } from './load/structure'
import { sallowMill } from './scenario'
import { Simulation, type SimulationState } from './simulation'
import type { StorySwitches } from './story'
import { truthOf } from './truth'
import { HISTORY_S, makeWorld, type World } from './world'

export type SeedDemoOptions = {
  database: Database
  /** where the demo's key, birth, saved state and truth are kept */
  dataDir: string
  now: Date
  stories?: StorySwitches
  seed?: number
  /** seconds of history before the first start, for tests; eight weeks when left out */
  historyS?: number
  /** told in words what is being done */
  say?: (line: string) => void
}

export type SeededDemo = DemoIds & {
  world: World
  /** true when this call began the building; a half-finished first start goes on with false */
  isNew: boolean
  /** epoch seconds: the record is whole from the history's start up to here */
  filledToS: number
  readingsAdded: number
  birth: DemoBirth
  /** the mill as it stands at `filledToS`: what goes on live from here */
  state: SimulationState
}

/** Readings in one transaction: a week. */
const BATCH_MIN = 7 * 1440
const LAST_HOURS_S = 3 * 3600

/**
 * Makes the demo building where there is none and fills its record up to the last whole minute: eight weeks the first time, later
 * whatever is missing. Safe to run again, also after a kill at any moment: the building is made in one transaction, the readings
 * in transactions of a week, and a reading's value depends on the seed and its instant alone.
 */
export async function seedDemo(options: SeedDemoOptions): Promise<SeededDemo> {
  const { database, dataDir, now } = options
  const key = demoKey(dataDir)
  const { world, ids, isNew, birth } = await raiseBuilding(options, key)
  const untilS = Math.floor(now.getTime() / 60000) * 60
  const recordedS = await recordedUntil(database, world, ids)
  const fromS = recordedS === null ? world.historyStartS : Math.floor(recordedS / 60) * 60
  await ensureMonths(database, Math.min(fromS, untilS), untilS + 62 * 86400)
  // the last hours by themselves: the state before them serves a start that finds its record whole up to a radio gap
  const ends = [untilS - LAST_HOURS_S, untilS].filter((endS) => endS >= fromS)
  let state = readState(dataDir, birth, fromS / 60)
  let readingsAdded = 0
  for (const endS of ends) {
    const startS = state ? Math.max(fromS, state.minute * 60) : fromS
    for (const batch of makeHistory(world, { fromS: startS, toS: endS, state, batchMinutes: BATCH_MIN })) {
      readingsAdded += await storeBatch(database, world, ids, batch, arrivalOf(world, batch, now))
      state = batch.state
      keepState(dataDir, birth, state)
      options.say?.(`demo readings up to ${new Date(batch.state.minute * 60000).toISOString()}`)
    }
  }
  const untilMinute = untilS / 60
  writeTruth(path.join(dataDir, 'demo-truth.json'), truthOf(world, world.historyStartS, untilS))
  return {
    ...ids,
    world,
    birth,
    isNew,
    filledToS: untilS,
    readingsAdded,
    state: stateAt(world, untilMinute, state),
  }
}

/** What lies before the first start is history, as if it had arrived in its time; later it is a gap that is filled now. */
function arrivalOf(world: World, batch: HistoryBatch, now: Date): Arrival {
  const isHistory = batch.startMinute * 60 < world.firstStartS
  return isHistory ? { kind: 'history' } : { kind: 'filled', at: now }
}

function stateAt(world: World, minute: number, from: SimulationState | undefined): SimulationState {
  const simulation = new Simulation(world, from)
  simulation.runTo(minute)
  return simulation.snapshot()
}

async function raiseBuilding(
  options: SeedDemoOptions,
  key: string,
): Promise<{ world: World; ids: DemoIds; isNew: boolean; birth: DemoBirth }> {
  const { database, dataDir, now } = options
  const historyS = options.historyS ?? HISTORY_S
  return database.asSystem('demo building', async (tx) => {
    await tx.execute(sql`SELECT pg_advisory_xact_lock(hashtext('ebbmark demo building'))`)
    const standing = await findDemo(tx, sallowMill.building.slug)
    const firstStartS = standing ? standing.historyStartS + historyS : Math.floor(now.getTime() / 60000) * 60
    const seed = options.seed ?? (standing ? readBirth(dataDir)?.seed : undefined) ?? DEMO_SEED
    const stories = options.stories ? { stories: options.stories } : {}
    const world = makeWorld(sallowMill, { seed, firstStartS, historyS, ...stories })
    const birth = { seed, firstStart: new Date(firstStartS * 1000).toISOString() }
    const ids = standing ? await adoptDemo(tx, world, standing, key) : await buildDemo(tx, world, key)
    writeBirth(dataDir, birth)
    return { world, ids, isNew: !standing, birth }
  })
}

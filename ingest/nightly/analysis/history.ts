import { setImmediate } from 'node:timers/promises'
import { type StoredNight, storeFailedNight, storeNight, storeRefit } from '@/db/changes/nights'
import type { Database } from '@/db/client'
import { type BuildingPlan, requireBuildingPlan, supplyStatesBetween } from '@/db/queries/building-plan'
import { finishedRuns, type NightRun } from '@/db/queries/nights'
import { readSeries } from '@/db/queries/series'
import { METHOD_VERSION } from '@/lib/air/decay/version'
import type { Series } from '@/lib/air/types'
import { type Clock, systemClock } from '@/lib/server/clock'
import { addDays } from '@/lib/time'
import { CARRIED_NIGHTS, type SupplyRow } from './inputs'
import { analyseNight } from './night'
import { refitReviews } from './refit-reviews'
import { type NightWindow, nightWindow } from './window'

/** Nights read from the database in one pass: enough to share the overlap, few enough for a building of 500 sensors. */
const NIGHTS_PER_READ = 14

export type HistoryProgress = { date: string; done: number; total: number; stored: StoredNight }

export type HistoryOptions = {
  database: Database
  buildingId: number
  /** building-local dates, both included */
  fromDate: string
  toDate: string
  clock?: Clock
  onProgress?: (progress: HistoryProgress) => void
  /** asked between nights; true ends the work early, with what is stored so far standing */
  stopped?: () => boolean
}

export type HistoryResult = { nights: number; changed: string[]; decaysAdded: number }

type Batch = { plan: BuildingPlan; records: Map<number, Series>; supply: SupplyRow[] }

/** All dates from one to another, both included. */
export function datesBetween(fromDate: string, toDate: string): string[] {
  const dates: string[] = []
  for (let date = fromDate; date <= toDate; date = addDays(date, 1)) dates.push(date)
  return dates
}

async function readBatch(
  database: Database,
  plan: BuildingPlan,
  first: NightWindow,
  last: NightWindow,
): Promise<Batch> {
  const sensorIds = [...new Set(plan.placements.map((placement) => placement.sensorId))]
  const span = { fromS: first.readFromS, toS: last.readToS }
  const records = await database.asSystemRaw('analyse nights', (client) =>
    readSeries(client, { sensorIds, ...span }),
  )
  const supply = await database.asSystem('analyse nights', (tx) =>
    supplyStatesBetween(tx, {
      buildingId: plan.building.id,
      from: new Date(span.fromS * 1000),
      to: new Date(span.toS * 1000),
    }),
  )
  return { plan, records, supply }
}

async function runNight(
  options: HistoryOptions,
  batch: Batch,
  window: NightWindow,
  runs: Map<string, NightRun>,
): Promise<StoredNight> {
  const { database, clock = systemClock } = options
  const { plan } = batch
  const startedAt = clock.now()
  const night = {
    organizationId: plan.building.organizationId,
    buildingId: plan.building.id,
    date: window.date,
    methodVersion: METHOD_VERSION,
    provisional: startedAt.getTime() / 1000 < window.finalFromS,
    startedAt,
  }
  const before = [...runs.values()].sort((a, b) => (a.localDate < b.localDate ? -1 : 1))
  const known = runs.get(window.date)
  const sameStage = known?.provisional === night.provisional
  const material = { ...batch, window, before, methodVersion: METHOD_VERSION }
  try {
    const result = analyseNight(material, sameStage ? known.inputHash : null)
    if (!('found' in result)) return { changed: false, added: 0, superseded: 0, reviewsToRefit: [] }
    const finishedAt = clock.now()
    const stored = await database.asSystem('store a night', async (tx) => {
      const outcome = await storeNight(tx, { ...night, ...result, finishedAt })
      for (const { reviewId, rates } of refitReviews(plan, batch.records, outcome.reviewsToRefit))
        await storeRefit(tx, { reviewId, rates })
      return outcome
    })
    runs.set(window.date, { localDate: window.date, finishedAt, ...result, provisional: night.provisional })
    return stored
  } catch (error) {
    const words = error instanceof Error ? error.message : String(error)
    await database
      .asSystem('store a failed night', (tx) =>
        storeFailedNight(tx, { ...night, inputHash: 'not known', error: words.slice(0, 2000) }),
      )
      .catch(() => undefined) // the first error is the one to tell
    throw error
  }
}

/**
 * Analyses the nights of one building from `fromDate` to `toDate` in order, because each leans on the quiet floors of those before. Reads
 * fourteen nights at a time; what is stored stands when it is ended early. A night whose inputs are as they were changes nothing.
 * @throws Error when the building is unknown; RangeError for a bad date or zone; the database's own errors
 */
export async function analyseHistory(options: HistoryOptions): Promise<HistoryResult> {
  const { database, buildingId, fromDate, toDate } = options
  const result: HistoryResult = { nights: 0, changed: [], decaysAdded: 0 }
  const { plan, runs } = await database.asSystem('plan nights', async (tx) => ({
    plan: await requireBuildingPlan(tx, { buildingId }),
    runs: await finishedRuns(tx, {
      buildingId,
      methodVersion: METHOD_VERSION,
      fromDate: addDays(fromDate, -CARRIED_NIGHTS),
      toDate,
    }),
  }))
  const known = new Map(runs.map((run) => [run.localDate, run]))
  const windows = datesBetween(fromDate, toDate).map((date) => nightWindow(date, plan.building.timeZone))
  for (let i = 0; i < windows.length; i += NIGHTS_PER_READ) {
    const part = windows.slice(i, i + NIGHTS_PER_READ)
    if (options.stopped?.()) break
    const batch = await readBatch(database, plan, part[0] as NightWindow, part.at(-1) as NightWindow)
    for (const window of part) {
      if (options.stopped?.()) break
      const stored = await runNight(options, batch, window, known)
      result.nights++
      result.decaysAdded += stored.added
      if (stored.changed) result.changed.push(window.date)
      options.onProgress?.({ date: window.date, done: result.nights, total: windows.length, stored })
      await setImmediate() // heartbeats and signals get their turn between nights
    }
  }
  return result
}

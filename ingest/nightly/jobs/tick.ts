import { queueJob } from '@/db/changes/jobs'
import { clearLateHours } from '@/db/changes/nights'
import type { Database, Tx } from '@/db/client'
import { listBuildings } from '@/db/queries/building-plan'
import { hasDigestsToWrite } from '@/db/queries/digests'
import { finishedNights, firstReadingAt, lateHours } from '@/db/queries/nights'
import { listKeptPeriods } from '@/db/queries/retention'
import { METHOD_VERSION } from '@/lib/air/decay/version'
import type { Clock } from '@/lib/server/clock'
import { env } from '@/lib/server/env'
import { addDays, localDate } from '@/lib/time'
import { nightWindow } from '../analysis/window'
import { dueNights, lastWholeWeek, nightsToRepeat } from '../due'
import type { ScheduledJob } from '../job'
import { keptSince } from '../retention/policy'

/** From this many nights on they are read together. */
const NIGHTS_FOR_HISTORY = 3

type Building = Awaited<ReturnType<typeof listBuildings>>[number]

async function queueNights(tx: Tx, building: Building, dates: readonly string[], onlyIfAbsent: boolean) {
  const first = dates[0]
  const last = dates.at(-1)
  if (first === undefined || last === undefined) return
  const buildingId = building.id
  if (dates.length >= NIGHTS_FOR_HISTORY) {
    const payload = { buildingId, fromDate: first, toDate: last }
    await queueJob(tx, { task: 'analyse-history', payload, onlyIfAbsent })
    return
  }
  for (const date of dates)
    await queueJob(tx, { task: 'analyse-night', payload: { buildingId, date }, onlyIfAbsent })
}

async function queueDigests(tx: Tx, building: Building, nowS: number, finalDates: ReadonlySet<string>) {
  const weekStart = lastWholeWeek(nowS, building.timeZone)
  const nights = [0, 1, 2, 3, 4, 5, 6].map((days) => addDays(weekStart, days))
  if (!nights.every((night) => finalDates.has(night))) return
  if (!(await hasDigestsToWrite(tx, { buildingId: building.id, weekStart }))) return
  const payload = { buildingId: building.id, weekStart }
  await queueJob(tx, { task: 'write-digests', payload, onlyIfAbsent: true })
}

async function tickBuilding(tx: Tx, building: Building, now: Date, since: Date | null): Promise<void> {
  const { id: buildingId, timeZone } = building
  const nowS = now.getTime() / 1000
  const firstAt = await firstReadingAt(tx, { buildingId })
  const firstDate = firstAt && localDate(firstAt.getTime() / 1000, timeZone)
  const runs = await finishedNights(tx, { buildingId, methodVersion: METHOD_VERSION })
  // a night of which readings are deleted by policy must not replace what was found while they were there
  const isWhole = (date: string) =>
    since === null || nightWindow(date, timeZone).readFromS * 1000 >= since.getTime()
  const due = dueNights({ timeZone, nowS, firstDate, runs }).filter(isWhole)
  await queueNights(tx, building, due, true)
  const marks = await lateHours(tx, { buildingId, until: now })
  const lateHoursS = marks.map((mark) => mark.hour.getTime() / 1000)
  // not "only if absent": a run that has read already must be followed by one that reads what came late
  await queueNights(tx, building, nightsToRepeat({ timeZone, lateHoursS, runs }).filter(isWhole), false)
  if (marks.length > 0) await clearLateHours(tx, { buildingId, until: now })
  const final = new Set(runs.filter((run) => !run.provisional).map((run) => run.localDate))
  await queueDigests(tx, building, nowS, final)
  await queueJob(tx, { task: 'watch-sensors', payload: { buildingId }, onlyIfAbsent: true })
}

/** Compares each building's local time with what has run, and queues what is due. Marks of late readings go in the transaction that queues their nights. */
export async function tick({
  database,
  clock,
  readingsKeptDays = null,
}: {
  database: Database
  clock: Clock
  /** days of readings that the deployment keeps where an organisation says nothing; null keeps all */
  readingsKeptDays?: number | null
}): Promise<void> {
  const now = clock.now()
  const buildings = await database.asSystem('tick', (tx) => listBuildings(tx))
  const kept = await database.asSystem('tick', (tx) => listKeptPeriods(tx))
  const own = new Map(kept.map((each) => [each.buildingId, each.readingsKeptDays]))
  for (const building of buildings) {
    const since = keptSince(now, own.get(building.id) ?? readingsKeptDays)
    await database.asSystem('tick', (tx) => tickBuilding(tx, building, now, since))
  }
}

export const tickJob: ScheduledJob = {
  task: 'tick',
  run: ({ database, clock }) =>
    tick({ database, clock, readingsKeptDays: env().EBBMARK_READINGS_KEPT_DAYS ?? null }),
}

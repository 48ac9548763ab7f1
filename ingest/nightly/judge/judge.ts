import { storeFindings } from '@/db/changes/findings'
import { lockBuildingNights } from '@/db/changes/nights'
import { notifyLive } from '@/db/changes/notice'
import { markSuspects } from '@/db/changes/suspects'
import { type NewRoomWeek, storeRateChanges, storeRoomWeeks } from '@/db/changes/weeks'
import type { Database, Tx } from '@/db/client'
import { type BuildingPlan, requireBuildingPlan } from '@/db/queries/building-plan'
import { finishedRuns, lastFinishedNight, leadDecaysBetween } from '@/db/queries/nights'
import { standingReviews } from '@/db/queries/weeks'
import { METHOD_VERSION } from '@/lib/air/decay/version'
import { weekStartOf } from '@/lib/air/nights'
import { VERDICT_DAYS } from '@/lib/air/verdict'
import { type Clock, systemClock } from '@/lib/server/clock'
import { addDays } from '@/lib/time'
import { airSystemOf } from '../analysis/rooms'
import { CHANGE_NIGHTS, presentSince, roomChanges } from './changes'
import { withoutEarlyStops } from './early-stops'
import { type JudgedEstimate, judgedEstimates } from './estimates'
import { findAll, NIGHTLY_FINDINGS } from './findings'
import { supplyStoppedEarly } from './findings/supply-stopped-early'
import { roomWeek } from './room-week'
import { suspectSensors } from './suspects'

/** Nights of carried facts that findings look at. */
const CARRIED_FOR_FINDINGS = 42

export type JudgeOptions = {
  database: Database
  buildingId: number
  /** nights that changed, both included: every week whose 28 days hold one of them is judged again */
  fromDate: string
  toDate: string
  clock?: Clock
}

export type JudgeResult = { weeks: string[]; rowsChanged: number }

type Material = { plan: BuildingPlan; lastNight: string; all: JudgedEstimate[] }

async function gather(tx: Tx, buildingId: number, fromDate: string, lastNight: string): Promise<Material> {
  const plan = await requireBuildingPlan(tx, { buildingId })
  const span = { buildingId, fromDate: addDays(fromDate, -CHANGE_NIGHTS), toDate: lastNight }
  const decays = await leadDecaysBetween(tx, span)
  const all = judgedEstimates(decays, await standingReviews(tx, span))
  return { plan, lastNight, all }
}

/** The estimates by room as far as they were known on a night, with the modes that hold against a supply that stops early. */
function knownOn({ plan, all }: Material, throughNight: string): Map<number, JudgedEstimate[]> {
  const known = all.filter((one) => one.night <= throughNight)
  const early = supplyStoppedEarly({
    ...{ plan, lastNight: throughNight, estimates: known, methodVersion: METHOD_VERSION },
    ...{ runs: [], verdicts: [] },
  })
  const byRoom = new Map<number, JudgedEstimate[]>()
  for (const one of withoutEarlyStops(plan, known, early)) {
    const own = byRoom.get(one.roomId)
    if (own) own.push(one)
    else byRoom.set(one.roomId, [one])
  }
  return byRoom
}

/** Mondays of the weeks that nights from one date to another bear on, up to the week of the last analysed night. */
export function weeksTouched(fromDate: string, toDate: string, lastNight: string): string[] {
  const until = [weekStartOf(addDays(toDate, VERDICT_DAYS - 1)), weekStartOf(lastNight)].sort()[0] as string
  const weeks: string[] = []
  for (let week = weekStartOf(fromDate); week <= until; week = addDays(week, 7)) weeks.push(week)
  return weeks
}

/** Every room's rows of one week, as of its Sunday or of the last analysed night. */
function judgeWeek(material: Material, weekStart: string): NewRoomWeek[] {
  const { plan, lastNight } = material
  const throughNight = [addDays(weekStart, 6), lastNight].sort()[0] as string
  const byRoom = knownOn(material, throughNight)
  return plan.rooms
    .filter((room) => room.kind === 'room')
    .flatMap((room) => {
      const estimates = byRoom.get(room.id) ?? []
      const occupied = airSystemOf(plan, room) === 'natural' ? 'natural' : 'supply on'
      const lastChangeNight = presentSince(estimates, occupied, throughNight)
      return roomWeek({
        ...{ plan, room, weekStart, throughNight, estimates, lastChangeNight },
        methodVersion: METHOD_VERSION,
      })
    })
}

async function judgeNow(tx: Tx, material: Material, newest: NewRoomWeek[], now: Date) {
  const { plan, lastNight } = material
  const byRoom = knownOn(material, lastNight)
  const ids = { buildingId: plan.building.id, methodVersion: METHOD_VERSION, now }
  const changes = plan.rooms.flatMap((room) =>
    roomChanges(room, byRoom.get(room.id) ?? [], lastNight, METHOD_VERSION),
  )
  const runs = await finishedRuns(tx, {
    ...ids,
    fromDate: addDays(lastNight, 1 - CARRIED_FOR_FINDINGS),
    toDate: lastNight,
  })
  const findings = findAll({
    ...{ plan, lastNight, runs, estimates: material.all, methodVersion: METHOD_VERSION },
    verdicts: newest.filter((row) => row.verdict !== null),
  })
  await markSuspects(tx, { ...ids, suspects: suspectSensors(plan, runs, findings) })
  return (
    (await storeRateChanges(tx, { ...ids, changes })) +
    (await storeFindings(tx, { ...ids, kinds: NIGHTLY_FINDINGS, findings }))
  )
}

/**
 * Judges the weeks that some nights bear on, and what stands now: rate changes, findings, suspect sensors. Works from stored decays and
 * reviews alone; the same of them give the same rows, and judging twice changes none.
 */
export async function judgeWeeks(options: JudgeOptions): Promise<JudgeResult> {
  const { database, buildingId, fromDate, toDate, clock = systemClock } = options
  return database.asSystem('judge weeks', async (tx) => {
    await lockBuildingNights(tx, buildingId)
    const lastNight = await lastFinishedNight(tx, { buildingId, methodVersion: METHOD_VERSION })
    if (lastNight === null) return { weeks: [], rowsChanged: 0 }
    const material = await gather(tx, buildingId, fromDate, lastNight)
    const roomIds = material.plan.rooms.map((room) => room.id)
    const weeks = weeksTouched(fromDate, toDate, lastNight)
    const now = clock.now()
    let rowsChanged = 0
    for (const weekStart of weeks) {
      const rows = judgeWeek(material, weekStart)
      rowsChanged += await storeRoomWeeks(tx, {
        ...{ buildingId, weekStart, roomIds, rows, now },
        methodVersion: METHOD_VERSION,
      })
    }
    const newest = judgeWeek(material, weekStartOf(lastNight))
    rowsChanged += await judgeNow(tx, material, newest, now)
    if (rowsChanged > 0) await notifyLive(tx, 'night', [buildingId])
    return { weeks, rowsChanged }
  })
}

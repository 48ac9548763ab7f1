import { and, asc, desc, eq, gte, inArray, isNull, lte, max, min, sql } from 'drizzle-orm'
import type { QuietFloor } from '@/lib/air/decay/background'
import type { SupplyStop } from '@/lib/air/decay/modes'
import type { Tx } from '../client'
import { decays, lateReadings, nightRuns, placements, readings } from '../schema'

/** What one room's air was like on one local day, from its lead sensor: levels in ppm, times in minutes. */
export type DayFacts = {
  outdoorPpm: number
  /** the limit as a level: outdoor air already added to it */
  limitPpm: number
  /** the fullest quarter of an hour; null where no quarter was half covered by readings */
  peakPpm: number | null
  peakAtS: number | null
  /** minutes in occupied hours that the 15 min mean stood above the limit */
  overMin: number
  /** minutes of the day's occupied hours, and how many of them readings cover */
  occupiedMin: number
  coveredMin: number
}

/** What one night leaves for later ones, for findings and digests; keys are sensor ids, air handler ids and room ids. */
export type Carried = {
  quietFloors?: Record<string, QuietFloor>
  /** rates of the night that are sure, 1/h */
  sureRates?: Record<string, number[]>
  /** how many decays of the night showed demand control */
  demandControlled?: Record<string, number>
  /** with the clock of each stop, seconds after local midnight */
  supplyStops?: Record<string, (SupplyStop & { clockS: number })[]>
  days?: Record<string, DayFacts>
  notes?: { roomId: number; sensorId: number; code: string; text: string; atS?: number }[]
}

export type NightRun = {
  localDate: string
  inputHash: string
  provisional: boolean
  finishedAt: Date
  carried: Carried
}

/** The newest finished run of each night from `fromDate` to `toDate` (both included) of one method version, in order of date. */
export async function finishedRuns(
  tx: Tx,
  {
    buildingId,
    methodVersion,
    fromDate,
    toDate,
  }: { buildingId: number; methodVersion: string; fromDate: string; toDate: string },
): Promise<NightRun[]> {
  const rows = await tx
    .selectDistinctOn([nightRuns.localDate])
    .from(nightRuns)
    .where(
      and(
        eq(nightRuns.buildingId, buildingId),
        eq(nightRuns.methodVersion, methodVersion),
        eq(nightRuns.state, 'done'),
        gte(nightRuns.localDate, fromDate),
        lte(nightRuns.localDate, toDate),
      ),
    )
    .orderBy(nightRuns.localDate, desc(nightRuns.finishedAt), desc(nightRuns.id))
  return rows.map((row) => ({
    localDate: row.localDate,
    inputHash: row.inputHash,
    provisional: row.provisional,
    finishedAt: row.finishedAt as Date,
    carried: row.carried as Carried,
  }))
}

/** Dates of the nights of one method version that are done, and whether their newest run was provisional. */
export function finishedNights(
  tx: Tx,
  { buildingId, methodVersion }: { buildingId: number; methodVersion: string },
): Promise<{ localDate: string; provisional: boolean }[]> {
  return tx
    .selectDistinctOn([nightRuns.localDate], {
      localDate: nightRuns.localDate,
      provisional: nightRuns.provisional,
    })
    .from(nightRuns)
    .where(
      and(
        eq(nightRuns.buildingId, buildingId),
        eq(nightRuns.methodVersion, methodVersion),
        eq(nightRuns.state, 'done'),
      ),
    )
    .orderBy(nightRuns.localDate, desc(nightRuns.finishedAt), desc(nightRuns.id))
}

/** The last night that is analysed, or null where none is. */
export async function lastFinishedNight(
  tx: Tx,
  { buildingId, methodVersion }: { buildingId: number; methodVersion: string },
): Promise<string | null> {
  const [row] = await tx
    .select({ date: max(nightRuns.localDate) })
    .from(nightRuns)
    .where(
      and(
        eq(nightRuns.buildingId, buildingId),
        eq(nightRuns.methodVersion, methodVersion),
        eq(nightRuns.state, 'done'),
      ),
    )
  return row?.date ?? null
}

/** When the first reading of a building's placed sensors was taken; null where there is none. */
export async function firstReadingAt(tx: Tx, { buildingId }: { buildingId: number }): Promise<Date | null> {
  // one look into the key of each sensor, instead of a scan over all readings
  const first = tx
    .select({ at: readings.at })
    .from(readings)
    .where(and(eq(readings.sensorId, placements.sensorId), gte(readings.at, placements.fromAt)))
    .orderBy(asc(readings.at))
    .limit(1)
    .as('first')
  const [row] = await tx
    .select({ at: min(first.at) })
    .from(placements)
    .innerJoinLateral(first, sql`true`)
    .where(eq(placements.buildingId, buildingId))
  return row?.at ?? null
}

/** Hours of a building for which readings came late, marked up to `until`. */
export function lateHours(tx: Tx, { buildingId, until }: { buildingId: number; until: Date }) {
  return tx
    .select({ hour: lateReadings.hour, receivedAt: lateReadings.receivedAt })
    .from(lateReadings)
    .where(and(eq(lateReadings.buildingId, buildingId), lte(lateReadings.receivedAt, until)))
    .orderBy(lateReadings.hour)
}

/** The decays of one night that stand: not superseded by a later run. */
export function currentDecays(tx: Tx, { buildingId, night }: { buildingId: number; night: string }) {
  return tx
    .select()
    .from(decays)
    .where(and(eq(decays.buildingId, buildingId), eq(decays.night, night), isNull(decays.supersededAt)))
    .orderBy(decays.roomId, decays.sensorId, decays.startAt)
}

/** The decays that stand of lead sensors of some rooms, of nights from `fromDate` to `toDate` (both included). */
export function leadDecaysBetween(
  tx: Tx,
  {
    buildingId,
    roomIds,
    fromDate,
    toDate,
  }: { buildingId: number; roomIds?: readonly number[]; fromDate: string; toDate: string },
) {
  return tx
    .select()
    .from(decays)
    .where(
      and(
        eq(decays.buildingId, buildingId),
        eq(decays.lead, true),
        isNull(decays.supersededAt),
        gte(decays.night, fromDate),
        lte(decays.night, toDate),
        roomIds ? inArray(decays.roomId, [...roomIds]) : undefined,
      ),
    )
    .orderBy(decays.roomId, decays.startAt)
}

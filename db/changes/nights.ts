import { and, eq, inArray, isNull, ne, sql } from 'drizzle-orm'
import type { BackgroundOrigin, Decay } from '@/lib/air/types'
import { canonicalJson } from '../canonical-json'
import type { Tx } from '../client'
import { newPublicId } from '../public-id'
import { type Carried, currentDecays, finishedRuns } from '../queries/nights'
import { decayReviews, decays, nightRuns } from '../schema'
import { addAuditEvent } from './audit'
import { notifyLive } from './notice'

export type DecayRow = typeof decays.$inferSelect
type NewDecay = typeof decays.$inferInsert

/** One decay and the sensor that saw it. */
export type FoundDecay = { roomId: number; sensorId: number; lead: boolean; decay: Decay }

export type NightResult = {
  organizationId: number
  buildingId: number
  date: string
  methodVersion: string
  inputHash: string
  provisional: boolean
  startedAt: Date
  finishedAt: Date
  roomsAnalysed: number
  found: readonly FoundDecay[]
  carried: Carried
}

/** A review whose own window now holds other readings, and the background to fit it with. */
export type ReviewToRefit = {
  reviewId: number
  sensorId: number
  fromS: number
  toS: number
  background: Decay['background']
}

export type StoredNight = {
  changed: boolean
  added: number
  superseded: number
  reviewsToRefit: ReviewToRefit[]
}

const NOTHING_CHANGED: StoredNight = { changed: false, added: 0, superseded: 0, reviewsToRefit: [] }

const instant = (epochS: number | null) => (epochS === null ? null : new Date(Math.round(epochS * 1000)))

function rowOf(night: NightResult, { roomId, sensorId, lead, decay }: FoundDecay): NewDecay {
  const { organizationId, buildingId, methodVersion, inputHash, provisional } = night
  return {
    publicId: newPublicId(),
    ...{ organizationId, buildingId, roomId, sensorId, lead, methodVersion, inputHash, provisional },
    night: night.date,
    startAt: instant(decay.startS) as Date,
    endAt: instant(decay.endS) as Date,
    kind: decay.kind,
    airChangeRatePerHour: decay.airChangeRatePerHour,
    airChangeRateLowPerHour: decay.airChangeRateLowPerHour,
    airChangeRateHighPerHour: decay.airChangeRateHighPerHour,
    outdoorRateLowPerHour: decay.outdoorRateLowPerHour,
    outdoorRateHighPerHour: decay.outdoorRateHighPerHour,
    backgroundPpm: decay.background?.ppm ?? null,
    backgroundUncertaintyPpm: decay.background?.standardUncertaintyPpm ?? null,
    backgroundOrigin: decay.background?.origin ?? null,
    startPpm: decay.startPpm,
    endPpm: decay.endPpm,
    meanAgeMin: decay.meanAgeMin,
    mode: decay.mode,
    modeFrom: decay.modeFrom,
    quality: decay.quality,
    reasons: decay.reasons,
    rateChangeAt: instant(decay.rateChangeAtS),
    rateChangeLowAt: instant(decay.rateChangeLowS),
    rateChangeHighAt: instant(decay.rateChangeHighS),
    lastPersonLeftAt: instant(decay.lastPersonLeftS),
    points: decay.points,
    lagOneCorrelation: decay.lagOneCorrelation,
    effectivePoints: decay.effectivePoints,
    residualSdPpm: decay.residualSdPpm,
    uncertaintyParts: decay.uncertaintyParts,
    checks: decay.checks,
    sentence: decay.sentence,
    supersededAt: null,
  }
}

/** What tells one row from another, whichever run wrote it: everything but its ids, its run and its place in time of writing. */
function contentOf(row: NewDecay): string {
  const own = new Set(['id', 'publicId', 'inputHash', 'provisional', 'supersededAt', 'createdAt'])
  return canonicalJson(Object.fromEntries(Object.entries(row).filter(([key]) => !own.has(key))))
}

const placeOf = (row: NewDecay) =>
  `${row.roomId} ${row.sensorId} ${row.startAt.getTime()} ${row.endAt.getTime()}`

/** Which of the fresh rows stand already as they are, which are new, and which standing ones are no longer found. */
function compare(standing: readonly DecayRow[], fresh: readonly NewDecay[]) {
  const left = new Map(standing.map((row) => [placeOf(row), row]))
  const kept: DecayRow[] = []
  const added: NewDecay[] = []
  for (const row of fresh) {
    const before = left.get(placeOf(row))
    if (before && contentOf(before) === contentOf(row)) {
      kept.push(before)
      left.delete(placeOf(row))
    } else added.push(row)
  }
  return { kept, added, gone: [...left.values()] }
}

const overlapMs = (a: { from: Date; to: Date }, b: { from: Date; to: Date }) =>
  Math.min(a.to.getTime(), b.to.getTime()) - Math.max(a.from.getTime(), b.from.getTime())

function backgroundOf(row: DecayRow): Decay['background'] {
  const { backgroundPpm: ppm, backgroundUncertaintyPpm: standardUncertaintyPpm, backgroundOrigin } = row
  if (ppm === null || standardUncertaintyPpm === null) return null
  return { ppm, standardUncertaintyPpm, origin: backgroundOrigin as BackgroundOrigin }
}

/** A review belongs to room and interval: it follows to the decay that now covers its window, and says so where the readings changed. */
async function moveReviews(
  tx: Tx,
  gone: readonly DecayRow[],
  added: readonly DecayRow[],
): Promise<ReviewToRefit[]> {
  const toRefit: ReviewToRefit[] = []
  if (gone.length === 0) return toRefit
  const ids = gone.map((row) => row.id)
  const reviews = await tx
    .select()
    .from(decayReviews)
    .where(and(inArray(decayReviews.decayId, ids), isNull(decayReviews.withdrawnAt)))
  for (const review of reviews) {
    const before = gone.find((row) => row.id === review.decayId) as DecayRow
    const window = { from: review.fromAt, to: review.toAt }
    const after = added
      .filter((row) => row.sensorId === before.sensorId)
      .map((row) => ({ row, overlap: overlapMs(window, { from: row.startAt, to: row.endAt }) }))
      .filter(({ overlap }) => overlap > 0)
      .sort((a, b) => b.overlap - a.overlap)[0]?.row
    const sameReadings =
      after !== undefined &&
      (['points', 'startPpm', 'endPpm'] as const).every((name) => after[name] === before[name]) &&
      placeOf(after) === placeOf(before)
    await tx
      .update(decayReviews)
      .set({ decayId: after?.id ?? before.id, dataChanged: review.dataChanged || !sameReadings })
      .where(eq(decayReviews.id, review.id))
    if (!sameReadings && review.decision === 'keep with window')
      toRefit.push({
        reviewId: review.id,
        sensorId: before.sensorId,
        fromS: review.fromAt.getTime() / 1000,
        toS: review.toAt.getTime() / 1000,
        background: backgroundOf(after ?? before),
      })
  }
  return toRefit
}

const STRENGTH = { accepted: 2, doubtful: 1, refused: 0 } as const

/** One decay for each sensor and start, which is what its identity allows: of two, the one that says more. */
function oneForEachStart(rows: readonly NewDecay[]): NewDecay[] {
  const byStart = new Map<string, NewDecay>()
  for (const row of rows) {
    const key = `${row.roomId} ${row.sensorId} ${row.startAt.getTime()}`
    const other = byStart.get(key)
    if (!other || STRENGTH[row.quality] > STRENGTH[other.quality]) byStart.set(key, row)
  }
  return [...byStart.values()]
}

async function storeDecays(tx: Tx, night: NightResult) {
  const fresh = oneForEachStart(night.found.map((one) => rowOf(night, one)))
  const standing = await currentDecays(tx, { buildingId: night.buildingId, night: night.date })
  const { kept, added, gone } = compare(standing, fresh)
  const goneIds = gone.map((row) => row.id)
  if (goneIds.length > 0)
    await tx.update(decays).set({ supersededAt: night.finishedAt }).where(inArray(decays.id, goneIds))
  const settled = kept.filter((row) => row.provisional !== night.provisional).map((row) => row.id)
  if (settled.length > 0)
    await tx.update(decays).set({ provisional: night.provisional }).where(inArray(decays.id, settled))
  const rows =
    added.length === 0
      ? []
      : await tx
          .insert(decays)
          .values(added)
          // the very same inputs gave this row before, and other inputs superseded it meanwhile: it stands again
          .onConflictDoUpdate({
            target: [decays.roomId, decays.sensorId, decays.methodVersion, decays.inputHash, decays.startAt],
            set: { supersededAt: null, provisional: sql`excluded.provisional` },
          })
          .returning()
  const reviewsToRefit = await moveReviews(tx, gone, rows)
  return { added: rows.length, superseded: gone.length, reviewsToRefit }
}

async function storeRun(tx: Tx, night: NightResult): Promise<void> {
  const run = {
    state: 'done' as const,
    provisional: night.provisional,
    startedAt: night.startedAt,
    finishedAt: night.finishedAt,
    roomsAnalysed: night.roomsAnalysed,
    decaysFound: night.found.length,
    error: null,
    carried: night.carried,
  }
  const { organizationId, buildingId, date: localDate, methodVersion, inputHash } = night
  await tx
    .insert(nightRuns)
    .values({ organizationId, buildingId, localDate, methodVersion, inputHash, ...run })
    .onConflictDoUpdate({
      target: [nightRuns.buildingId, nightRuns.localDate, nightRuns.methodVersion, nightRuns.inputHash],
      set: run,
    })
}

/** Nights of one building are written one after the other, whoever runs them. */
export async function lockBuildingNights(tx: Tx, buildingId: number): Promise<void> {
  await tx.execute(sql`SELECT pg_advisory_xact_lock(hashtext('ebbmark nights'), ${buildingId})`)
}

/**
 * Writes what a run of one night found. The same inputs a second time change nothing. Decays that came out as they stood keep their rows;
 * those that did not are superseded, never overwritten, and their reviews follow to the decay that covers their window.
 */
export async function storeNight(tx: Tx, night: NightResult): Promise<StoredNight> {
  await lockBuildingNights(tx, night.buildingId)
  const { buildingId, methodVersion, date } = night
  const [last] = await finishedRuns(tx, { buildingId, methodVersion, fromDate: date, toDate: date })
  const same = last?.inputHash === night.inputHash && last.provisional === night.provisional
  if (same) return NOTHING_CHANGED
  const stored = await storeDecays(tx, night)
  await storeRun(tx, night)
  await notifyLive(tx, 'night', [buildingId])
  return { changed: true, ...stored }
}

/** Takes over what a reviewer's window gives after late readings; null figures where it gives none any more. The audit trail has both. */
export async function storeRefit(
  tx: Tx,
  { reviewId, rates }: { reviewId: number; rates: { rate: number; low: number; high: number } | null },
): Promise<void> {
  const [before] = await tx.select().from(decayReviews).where(eq(decayReviews.id, reviewId))
  if (!before) return
  const figures = {
    airChangeRatePerHour: rates?.rate ?? null,
    airChangeRateLowPerHour: rates?.low ?? null,
    airChangeRateHighPerHour: rates?.high ?? null,
  }
  await tx.update(decayReviews).set(figures).where(eq(decayReviews.id, reviewId))
  await addAuditEvent(tx, {
    organizationId: before.organizationId,
    userId: null,
    action: 'decay.refitted',
    subjectKind: 'decay review',
    subjectId: String(reviewId),
    detail: {
      from: {
        rate: before.airChangeRatePerHour,
        low: before.airChangeRateLowPerHour,
        high: before.airChangeRateHighPerHour,
      },
      to: rates,
      reason: 'readings of its window changed since the review',
    },
  })
}

/** Records that the analysis of a night failed and why, so that health and the next tick see it. */
export async function storeFailedNight(
  tx: Tx,
  night: Pick<
    NightResult,
    'organizationId' | 'buildingId' | 'date' | 'methodVersion' | 'inputHash' | 'provisional' | 'startedAt'
  > & { error: string },
): Promise<void> {
  const { date: localDate, error, ...rest } = night
  await tx
    .insert(nightRuns)
    .values({ ...rest, localDate, state: 'failed', error })
    .onConflictDoUpdate({
      target: [nightRuns.buildingId, nightRuns.localDate, nightRuns.methodVersion, nightRuns.inputHash],
      set: { state: 'failed', error, startedAt: night.startedAt },
      setWhere: ne(nightRuns.state, 'done'),
    })
}

/** Takes the marks of late readings up to `until` away: their nights are queued in the same transaction, and their hours are left to be rolled up again. */
export async function clearLateHours(
  tx: Tx,
  { buildingId, until }: { buildingId: number; until: Date },
): Promise<void> {
  await tx.execute(sql`
    WITH gone AS (DELETE FROM late_readings WHERE building_id = ${buildingId} AND received_at <= ${until} RETURNING building_id, hour)
    INSERT INTO rollup_hours (building_id, hour) SELECT building_id, hour FROM gone ON CONFLICT DO NOTHING`)
}

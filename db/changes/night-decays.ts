import { and, eq, inArray, isNull, sql } from 'drizzle-orm'
import type { BackgroundOrigin, Decay } from '@/lib/air/types'
import { canonicalJson } from '../canonical-json'
import type { Tx } from '../client'
import { newPublicId } from '../public-id'
import { type Carried, currentDecays } from '../queries/nights'
import { decayReviews, decays } from '../schema'

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

/** Puts the decays of a run beside those that stand: same ones keep their rows, others supersede, reviews follow. */
export async function storeDecays(tx: Tx, night: NightResult) {
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

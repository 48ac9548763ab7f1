import type { DecayRow } from '@/db/changes/nights'
import type { StandingReview } from '@/db/queries/weeks'
import type { Mode, ModeOrigin, Reason } from '@/lib/air/types'
import type { RoomEstimate } from '@/lib/air/weeks'

/** An estimate as weeks and verdicts take it, and where it came from. */
export type JudgedEstimate = RoomEstimate & {
  roomId: number
  decayId: number
  startAt: Date
  endAt: Date
  rateChangeAt: Date | null
  backgroundOrigin: string | null
  review: 'keep' | 'keep with window' | null
}

function estimateOf(row: DecayRow): JudgedEstimate {
  return {
    roomId: row.roomId,
    decayId: row.id,
    night: row.night,
    startAt: row.startAt,
    endAt: row.endAt,
    rateChangeAt: row.rateChangeAt,
    kind: row.kind,
    airChangeRatePerHour: row.airChangeRatePerHour,
    airChangeRateLowPerHour: row.airChangeRateLowPerHour,
    airChangeRateHighPerHour: row.airChangeRateHighPerHour,
    outdoorRateLowPerHour: row.outdoorRateLowPerHour,
    outdoorRateHighPerHour: row.outdoorRateHighPerHour,
    mode: row.mode as Mode,
    modeFrom: row.modeFrom as ModeOrigin | null,
    quality: row.quality,
    reasons: row.reasons as Reason[],
    uncertaintyParts: row.uncertaintyParts as RoomEstimate['uncertaintyParts'],
    backgroundOrigin: row.backgroundOrigin,
    review: null,
  }
}

/** A decay kept with a window of the reviewer's own speaks with that window's figures; null where the review has none. */
function withReviewedWindow({ review, decay }: StandingReview): JudgedEstimate | null {
  if (review.airChangeRatePerHour === null) return null
  return {
    ...estimateOf(decay),
    startAt: review.fromAt,
    endAt: review.toAt,
    kind: 'fit',
    airChangeRatePerHour: review.airChangeRatePerHour,
    airChangeRateLowPerHour: review.airChangeRateLowPerHour,
    airChangeRateHighPerHour: review.airChangeRateHighPerHour,
    quality: 'accepted',
    reasons: [],
    // the parts belong to the first fit; without them the interval's width speaks
    uncertaintyParts: null,
    review: 'keep with window',
  }
}

/**
 * The estimates that count, after people's reviews: one left out is gone, one kept counts as accepted, one kept with its own window counts
 * with the window's figures. The decays themselves stay as they are. In order of room and start.
 */
export function judgedEstimates(
  decays: readonly DecayRow[],
  reviews: readonly StandingReview[],
): JudgedEstimate[] {
  // the newest review of a decay holds
  const byDecay = new Map(reviews.map((one) => [one.review.decayId, one]))
  const own = decays.flatMap((row) => {
    const reviewed = byDecay.get(row.id)
    if (!reviewed) return [estimateOf(row)]
    if (reviewed.review.decision === 'leave out') return []
    if (reviewed.review.decision === 'keep with window') return withReviewedWindow(reviewed) ?? []
    const estimate = estimateOf(row)
    return row.quality === 'refused'
      ? [estimate]
      : [{ ...estimate, quality: 'accepted' as const, reasons: [], review: 'keep' as const }]
  })
  // a window that a person drew stands also where the analysis no longer finds a decay there
  const found = new Set(decays.map((row) => row.id))
  const alone = [...byDecay.values()]
    .filter(
      ({ review, decay }) => review.decision === 'keep with window' && decay.lead && !found.has(decay.id),
    )
    .flatMap((one) => withReviewedWindow(one) ?? [])
  return [...own, ...alone].sort(
    (a, b) => a.roomId - b.roomId || a.startAt.getTime() - b.startAt.getTime() || a.decayId - b.decayId,
  )
}

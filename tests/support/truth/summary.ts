import type { Judgement, Verdict } from './judge'

/** One row of the benchmark's table. Shares are 0..1, errors and widths relative. */
export type Summary = {
  answers: number
  accepted: number
  doubtful: number
  refused: number
  evenings: number
  answerable: number
  answeredShare: number
  answeredOrBoundedShare: number
  medianError: number
  p90Error: number
  medianErrorAll: number
  bias: number
  coverage: number
  coverageEvening: number
  coverageDoubtful: number
  medianHalfWidth: number
  falseAcceptShare: number
  grossShare: number
  noDecay: number
  wrongNights: number
  boundsGiven: number
  boundsHold: number
  outdoorGiven: number
  outdoorHold: number
}

/** Quantile of a list (linear between order statistics); NaN for an empty one. */
export function quantile(values: readonly number[], p: number): number {
  if (values.length === 0) return Number.NaN
  const sorted = [...values].sort((a, b) => a - b)
  const at = (sorted.length - 1) * p
  const low = Math.floor(at)
  return sorted[low]! + (at - low) * (sorted[Math.min(sorted.length - 1, low + 1)]! - sorted[low]!)
}

const share = (part: number, whole: number) => (whole === 0 ? Number.NaN : part / whole)

function shareTrue(values: (boolean | null)[]): number {
  const known = values.filter((v) => v !== null)
  return share(known.filter(Boolean).length, known.length)
}

/** Sums up one class, or several pooled. */
export function summarise(judgements: readonly Judgement[]): Summary {
  const verdicts = judgements.flatMap((j) => j.verdicts)
  const evenings = judgements.flatMap((j) => j.evenings)
  const accepted = verdicts.filter((v) => v.answer.quality === 'accepted')
  const doubtful = verdicts.filter((v) => v.answer.quality === 'doubtful')
  const figures = accepted.filter((v) => v.error !== null)
  const evening = figures.filter((v) => v.evening)
  const answerable = new Set(evenings.filter((e) => e.answerable))
  const reached = (list: Verdict[]) =>
    new Set(list.flatMap((v) => (v.evening && answerable.has(v.evening) ? [v.evening] : []))).size
  const errors = (list: Verdict[]) => list.map((v) => Math.abs(v.error!))
  const bounds = verdicts.filter((v) => v.boundHolds !== null)
  const outdoor = verdicts.filter((v) => v.outdoorHolds !== null && v.answer.quality !== 'refused')
  return {
    answers: verdicts.length,
    accepted: accepted.length,
    doubtful: doubtful.length,
    refused: verdicts.length - accepted.length - doubtful.length,
    evenings: evenings.length,
    answerable: answerable.size,
    answeredShare: share(reached(accepted), answerable.size),
    answeredOrBoundedShare: share(reached([...accepted, ...doubtful]), answerable.size),
    medianError: quantile(errors(evening), 0.5),
    p90Error: quantile(errors(evening), 0.9),
    medianErrorAll: quantile(errors(figures), 0.5),
    bias: quantile(
      evening.map((v) => v.error!),
      0.5,
    ),
    coverage: shareTrue(figures.map((v) => v.covered)),
    coverageEvening: shareTrue(evening.map((v) => v.covered)),
    coverageDoubtful: shareTrue(doubtful.filter((v) => v.error !== null).map((v) => v.covered)),
    medianHalfWidth: quantile(
      figures.flatMap((v) => (v.halfWidth === null ? [] : [v.halfWidth])),
      0.5,
    ),
    falseAcceptShare: share(figures.filter((v) => v.falseAccept).length, figures.length),
    grossShare: share(figures.filter((v) => v.gross).length, figures.length),
    noDecay: accepted.filter((v) => v.noDecay).length,
    wrongNights: verdicts.filter((v) => !v.nightRight).length,
    boundsGiven: bounds.length,
    boundsHold: bounds.filter((v) => v.boundHolds).length,
    outdoorGiven: outdoor.length,
    outdoorHold: outdoor.filter((v) => v.outdoorHolds).length,
  }
}

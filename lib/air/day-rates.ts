import type { Decay, Reason } from './types'

/** What combining needs of a decay. */
export type RoomEstimate = Pick<
  Decay,
  | 'night'
  | 'kind'
  | 'airChangeRatePerHour'
  | 'airChangeRateLowPerHour'
  | 'airChangeRateHighPerHour'
  | 'outdoorRateLowPerHour'
  | 'outdoorRateHighPerHour'
  | 'mode'
  | 'modeFrom'
  | 'quality'
  | 'reasons'
  | 'uncertaintyParts'
>

/**
 * One local day of one room in one mode. `lowLn` and `highLn` are the day's ln(rate): equal where it was measured, apart (or infinite)
 * where only bounds are known. The other fields are standard uncertainties of ln(rate).
 */
export type DayRate = {
  night: string
  lowLn: number
  highLn: number
  ownSdLn: number
  backgroundSdLn: number
  decays: number
}

/** Doubts that say what the figure is, not that it is wrong; such estimates still speak for their day. */
const LABELS: ReadonlySet<Reason> = new Set<Reason>([
  'recirculation-possible',
  'neighbour-coupled',
  'demand-controlled',
  'too-fast',
  'too-slow',
  'background-unknown',
])

/** Errors below this are not believed when decays of one day are weighted, so that none of them rules alone (engineering choice). */
const LEAST_OWN_SD = 0.03

/** Whether an estimate may stand for its day: accepted, or doubtful only for a reason that its interval already carries. */
export function isUsable(estimate: RoomEstimate): boolean {
  if (estimate.quality === 'refused') return false
  if (estimate.quality === 'accepted') return true
  return estimate.kind !== 'fit' || estimate.reasons.every((reason) => LABELS.has(reason))
}

type Limits = { lowLn: number; highLn: number; measured: boolean }

const lnOr = (rate: number | null, open: number) => (rate !== null && rate > 0 ? Math.log(rate) : open)

/** ln(rate) of one estimate as limits; null when it holds none. */
function limitsOf(estimate: RoomEstimate, rate: 'total' | 'outdoor'): Limits | null {
  const { outdoorRateLowPerHour: outdoorLow, outdoorRateHighPerHour: outdoorHigh } = estimate
  if (rate === 'outdoor' && (outdoorLow !== null || outdoorHigh !== null)) {
    return {
      lowLn: lnOr(outdoorLow, Number.NEGATIVE_INFINITY),
      highLn: lnOr(outdoorHigh, Number.POSITIVE_INFINITY),
      measured: false,
    }
  }
  if (estimate.kind === 'fit') {
    if (estimate.airChangeRatePerHour === null || !(estimate.airChangeRatePerHour > 0)) return null
    const ln = Math.log(estimate.airChangeRatePerHour)
    return { lowLn: ln, highLn: ln, measured: true }
  }
  const lowLn = lnOr(estimate.airChangeRateLowPerHour, Number.NEGATIVE_INFINITY)
  const highLn = lnOr(estimate.airChangeRateHighPerHour, Number.POSITIVE_INFINITY)
  return lowLn === Number.NEGATIVE_INFINITY && highLn === Number.POSITIVE_INFINITY
    ? null
    : { lowLn, highLn, measured: false }
}

/** Standard uncertainty of ln(rate) without the background's; from the 95 % limits where the parts are not given. */
function ownSdOf(estimate: RoomEstimate): number {
  const parts = estimate.uncertaintyParts
  if (parts) return Math.hypot(parts.regression, parts.model)
  const { airChangeRateLowPerHour: low, airChangeRateHighPerHour: high } = estimate
  return low !== null && high !== null && low > 0 ? Math.log(high / low) / (2 * 1.96) : 0
}

/** Weighted mean of a day's measured decays; its error grows with their disagreement (Birge ratio). */
function combineMeasured(values: readonly number[], errors: readonly number[]) {
  const weights = errors.map((u) => 1 / Math.max(u, LEAST_OWN_SD) ** 2)
  const total = weights.reduce((sum, w) => sum + w, 0)
  const mean = values.reduce((sum, y, i) => sum + weights[i]! * y, 0) / total
  const own = Math.sqrt(weights.reduce((sum, w, i) => sum + (w * errors[i]!) ** 2, 0)) / total
  const chi2 = values.reduce((sum, y, i) => sum + weights[i]! * (y - mean) ** 2, 0)
  const birge = values.length > 1 ? Math.sqrt(chi2 / (values.length - 1)) : 1
  return { mean, sd: Math.max(own, own * birge) }
}

function combineDay(night: string, estimates: readonly RoomEstimate[], rate: 'total' | 'outdoor'): DayRate[] {
  const held = estimates.flatMap((estimate) => {
    const limits = limitsOf(estimate, rate)
    return limits ? [{ estimate, limits }] : []
  })
  if (held.length === 0) return []
  const measured = held.filter((one) => one.limits.measured)
  const used = measured.length > 0 ? measured : held
  const backgroundSdLn = Math.max(...used.map((one) => one.estimate.uncertaintyParts?.background ?? 0))
  if (measured.length > 0) {
    const { mean, sd } = combineMeasured(
      measured.map((one) => one.limits.lowLn),
      measured.map((one) => ownSdOf(one.estimate)),
    )
    return [{ night, lowLn: mean, highLn: mean, ownSdLn: sd, backgroundSdLn, decays: held.length }]
  }
  // bounds of one day: the widest is kept, because a day may hold a fast hour and a slow one
  const lowLn = Math.min(...held.map((one) => one.limits.lowLn))
  const highLn = Math.max(...held.map((one) => one.limits.highLn))
  return [{ night, lowLn, highLn, ownSdLn: 0, backgroundSdLn, decays: held.length }]
}

/** The days of usable estimates (one mode), in order of date. `outdoor` takes the outdoor range where an estimate has one. */
export function dayRates(estimates: readonly RoomEstimate[], rate: 'total' | 'outdoor' = 'total'): DayRate[] {
  const byNight = new Map<string, RoomEstimate[]>()
  for (const estimate of estimates) {
    if (!isUsable(estimate)) continue
    const day = byNight.get(estimate.night)
    if (day) day.push(estimate)
    else byNight.set(estimate.night, [estimate])
  }
  return [...byNight.keys()].sort().flatMap((night) => combineDay(night, byNight.get(night)!, rate))
}

/**
 * Was the room empty? Somebody inside adds a steady source, so that the level ebbs towards a floor above the background and the rate looks too
 * slow (local rate A (E - Es) / E). The readings' own opinion of the floor is weighed against the known background, for the smallest source that
 * would matter: one quiet person, or a rate wrong by a fifth.
 */
import { QUIET_PERSON_LPS } from '@/lib/air/constants'
import { quantile } from '@/lib/math/robust'
import type { Prior } from './piecewise'
import type { Reading } from './run'

/** A share by which people may falsify a rate before it matters. */
const MATTERS = 1.2

/** Excess in ppm that a steady source (L/s) keeps up in a room of `volumeM3` at a rate (1/h): 3.6e6 g / (A V). */
export function steadyExcessPpm(sourceLps: number, ratePerHour: number, volumeM3: number): number {
  return (3.6e6 * sourceLps) / (ratePerHour * volumeM3)
}

/**
 * Log likelihood ratio of "empty" over "somebody inside" from the shape of one decay alone; positive speaks for empty. To first order: the rate
 * and the floor are jointly normal, and the prior on the background is taken out of the fit again.
 */
export function shapeEvidence(
  reading: Reading,
  prior: Prior,
  volumeM3: number,
  known: readonly number[] = [],
): number {
  const { fit, piece, index } = reading
  const size = fit.ratesPerHour.length + 3
  const b = size - 2
  const a = index + 1
  const variance = fit.covariance[b * size + b]!
  const pull = fit.covariance[a * size + b]! / variance / piece.ratePerHour
  const matters = pull > 1e-6 ? Math.log(MATTERS) / pull : 1e3
  // with people inside the true rate is above the apparent one, and one person's lift the smaller
  const trueRate = Math.max(2 * piece.ratePerHour, 0.05, ...known)
  const onePerson = 0.7 * steadyExcessPpm(QUIET_PERSON_LPS, trueRate, volumeM3)
  const smallest = Math.max(matters, onePerson)
  // a level cannot ebb below the floor that a source keeps up
  if (piece.endExcessPpm < 0.75 * smallest - 2 * prior.sdPpm) return 8
  const information = Math.max(1e-9, 1 / variance - 1 / prior.sdPpm ** 2)
  const seen = (fit.backgroundPpm / variance - prior.ppm / prior.sdPpm ** 2) / information - prior.ppm
  const spread = prior.sdPpm ** 2 + 1 / information
  // a floor seen far below the background means a rate that rises: people who leave one by one, no proof of an empty room
  const floor = Math.max(seen, -0.7 * Math.sqrt(spread))
  const lift = Math.max(smallest, floor)
  return Math.min(8, ((floor - lift) ** 2 - floor ** 2) / (2 * spread))
}

/** Log likelihood ratio of "empty" from rates that this room is known to have: near one of them speaks for empty, below them all a little against. */
export function rateEvidence(reading: Reading, known: readonly number[]): number {
  if (known.length === 0) return 0
  // a stopped fan's rate would excuse anything: only the faster rates count
  const fast = known.filter((rate) => rate > 0.55 * quantile(known, 0.8))
  const { regression, background } = reading.estimate.parts
  const sd = Math.hypot(0.06, regression, background)
  const own = Math.log(Math.max(0.01, reading.piece.ratePerHour))
  let best = Number.NEGATIVE_INFINITY
  for (const rate of fast) {
    const z = (own - Math.log(rate)) / sd
    best = Math.max(best, -0.5 * z * z - Math.log(sd * Math.sqrt(2 * Math.PI)))
  }
  // with people inside, the apparent rate may lie anywhere over about one and a half in ln A
  return Math.max(-2, best + Math.log(1.5))
}

/** True when rates are known and none of them is near: a low and lonely decay is then more likely disturbed than new. */
export function unsupported(reading: Reading, known: readonly number[]): boolean {
  const { regression, background } = reading.estimate.parts
  const margin = 0.12 + 2 * Math.hypot(regression, background)
  const own = Math.log(Math.max(0.01, reading.piece.ratePerHour))
  return known.length >= 2 && known.every((rate) => Math.abs(own - Math.log(rate)) > margin)
}

/** Probability that somebody was inside, from the evidence and how likely that is at such a time. */
export function peopleProbability(evidence: number, before: number): number {
  const odds = (before / (1 - before)) * Math.exp(-evidence)
  return odds / (1 + odds)
}

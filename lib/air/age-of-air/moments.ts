import type { Curve } from './curve'

/** Zeroth and first moment of F(t): μ0 = ∫F dt (s), μ1 = ∫tF dt (s²). */
export type Moments = { mu0: number; mu1: number }

/** Exponential tail beyond the record: level at its start and rate (1/s), with the relative doubt of the rate. */
export type Tail = { fromS: number; share: number; ratePerS: number; rateDoubt: number }

export type CurveMoments = Moments & {
  tail: Tail | null
  /** parts of the moments that lie in the tail */
  tailMu0: number
  tailMu1: number
  /** false when the record ends above noise without falling */
  decays: boolean
  /** standard error of μ0 and μ1 (relative) because a jump between two samples is not resolved in time */
  jumpDoubt: number
}

/** One interval: exponential between well-measured falling values (exact for mixing at any step), linear elsewhere. */
function intervalMoments(t1: number, t2: number, f1: number, f2: number, floor: number): Moments {
  const h = t2 - t1
  if (f2 > floor && f1 > f2 && f2 > 0.5 * f1) {
    const k = Math.log(f1 / f2) / h
    if (k * h > 1e-4) {
      return { mu0: (f1 - f2) / k, mu1: (t1 * f1 - t2 * f2) / k + (f1 - f2) / k ** 2 }
    }
  }
  return { mu0: (h / 2) * (f1 + f2), mu1: (h / 6) * (t1 * (2 * f1 + f2) + t2 * (f1 + 2 * f2)) }
}

function integrate(curve: Curve, last: number): Moments & { jumpDoubt: number } {
  const { timeS, share } = curve
  const floor = Math.max(5 * curve.noise, 0.01)
  let mu0 = 0
  let mu1 = 0
  let jumps = 0
  for (let i = 1; i <= last; i++) {
    const part = intervalMoments(timeS[i - 1]!, timeS[i]!, share[i - 1]!, share[i]!, floor)
    mu0 += part.mu0
    mu1 += part.mu1
    const drop = Math.abs(share[i]! - share[i - 1]!)
    if (drop > 0.2) jumps += (drop * (timeS[i]! - timeS[i - 1]!)) ** 2 / 12
  }
  return { mu0, mu1, jumpDoubt: mu0 > 0 ? Math.sqrt(jumps) / mu0 : 0 }
}

function smoothed(share: readonly number[], i: number): number {
  const part = share.slice(Math.max(0, i - 2), i + 3)
  return part.reduce((sum, value) => sum + value, 0) / part.length
}

/** Weighted exponential fit C e^(−λ(t − t0)) by Gauss–Newton from a log-linear start; null when the points do not fall. */
function fitExponential(timeS: readonly number[], share: readonly number[], originS: number) {
  let [sw, st, sy, stt, sty] = [0, 0, 0, 0, 0]
  share.forEach((f, i) => {
    if (f <= 0) return
    const w = f * f
    const t = timeS[i]! - originS
    sw += w
    st += w * t
    sy += w * Math.log(f)
    stt += w * t * t
    sty += w * t * Math.log(f)
  })
  const spread = sw * stt - st * st
  if (!(spread > 0)) return null
  let rate = -(sw * sty - st * sy) / spread
  let level = Math.exp((sy + rate * st) / sw)
  for (let step = 0; step < 8; step++) {
    let [aa, ab, bb, ga, gb] = [0, 0, 0, 0, 0]
    share.forEach((f, i) => {
      const t = timeS[i]! - originS
      const e = Math.exp(-rate * t)
      const residual = f - level * e
      const dRate = -level * t * e
      aa += e * e
      ab += e * dRate
      bb += dRate * dRate
      ga += e * residual
      gb += dRate * residual
    })
    const det = aa * bb - ab * ab
    if (!(Math.abs(det) > 0)) break
    level += (bb * ga - ab * gb) / det
    rate += (aa * gb - ab * ga) / det
  }
  if (!(Number.isFinite(rate) && rate > 0 && level > 0)) return null
  let [aa, ab, bb] = [0, 0, 0]
  for (const timeAt of timeS) {
    const t = timeAt - originS
    const e = Math.exp(-rate * t)
    aa += e * e
    ab -= e * level * t * e
    bb += (level * t * e) ** 2
  }
  // standard error of the rate per unit of noise
  return { rate, level, rateGain: Math.sqrt(aa / Math.max(aa * bb - ab * ab, 1e-300)) }
}

/** Least samples in the tail's fit, and how many e-foldings before the end it reaches back. */
const TAIL_LEAST = 6
const TAIL_FOLDS = 1.2
/** Below this share nothing more is read from a record, even without noise. */
const LEAST_SHARE = 0.002
/** Doubt of the tail's rate that is always there (engineering choice: the last fold is never quite the slowest mode). */
const LEAST_RATE_DOUBT = 0.03

/** A later half whose own rate is noisier than this, relative, is not preferred to the whole window. */
const MOST_RATE_ERROR = 0.15

/** Index of the last sample worth integrating: where the smoothed record sinks into noise or background doubt. */
function lastUseful(curve: Curve, floor: number): number {
  for (let i = 1; i < curve.share.length; i++) if (smoothed(curve.share, i) < floor) return i
  return curve.share.length - 1
}

function fitTail(curve: Curve, last: number, floor: number): Tail | null {
  const { timeS, share } = curve
  const end = Math.max(floor, smoothed(share, last))
  let first = last
  while (
    first > 1 &&
    (last - first + 1 < TAIL_LEAST || smoothed(share, first - 1) < end * Math.exp(TAIL_FOLDS))
  ) {
    first--
    if (last - first + 1 >= TAIL_LEAST && first < 0.5 * last) break
  }
  const fromS = timeS[last]!
  const fitPart = (from: number, to: number) =>
    fitExponential(timeS.slice(from, to + 1), share.slice(from, to + 1), fromS)
  const whole = fitPart(first, last)
  let fit = whole
  // as long as the two halves fall at rates that differ by more than noise, only the later half speaks for the tail
  while (fit && last - first + 1 >= 2 * TAIL_LEAST) {
    const middle = Math.floor((first + last + 1) / 2)
    const early = fitPart(first, middle)
    const late = fitPart(middle, last)
    if (!late || !early) break
    const noise = curve.noise * Math.hypot(early.rateGain, late.rateGain)
    if (Math.abs(early.rate - late.rate) <= Math.max(4 * noise, 0.01 * late.rate)) break
    if (curve.noise * late.rateGain > MOST_RATE_ERROR * late.rate) break
    first = middle
    fit = late
  }
  if (!fit || !whole) return null
  const bend = Math.abs(whole.rate - fit.rate) / fit.rate
  const rateDoubt = Math.min(0.5, Math.max(LEAST_RATE_DOUBT, bend))
  return { fromS, share: fit.level, ratePerS: fit.rate, rateDoubt }
}

/**
 * Moments of one curve with an exponential tail: adds C_N/λ to μ0 and C_N (t_N/λ + 1/λ²) to μ1. The record is read only down to where
 * noise or the background's doubt rules it.
 * @param floorDoubt standard uncertainty of F near zero, from the background (and the final level of a step-up)
 * @param rateFactor multiplies the tail's rate, to learn what its doubt does
 * @source Roulet, Ventilation and Airflow in Buildings, ch. 3; tail formulas derived
 */
export function curveMoments(curve: Curve, floorDoubt: number, rateFactor = 1): CurveMoments {
  const floor = Math.max(LEAST_SHARE, 3 * curve.noise, 4 * floorDoubt)
  const last = lastUseful(curve, floor)
  const { mu0, mu1, jumpDoubt } = integrate(curve, last)
  const none = { tail: null, tailMu0: 0, tailMu1: 0, jumpDoubt }
  // a record that dropped at once (piston) has nothing left to add
  if (smoothed(curve.share, last) < floor / 2 || curve.share[last]! <= 0)
    return { mu0, mu1, ...none, decays: true }
  const tail = fitTail(curve, last, floor)
  if (!tail) return { mu0, mu1, ...none, decays: false }
  const rate = tail.ratePerS * rateFactor
  const tailMu0 = tail.share / rate
  const tailMu1 = tail.share * (tail.fromS / rate + 1 / rate ** 2)
  return { mu0: mu0 + tailMu0, mu1: mu1 + tailMu1, tail, tailMu0, tailMu1, decays: true, jumpDoubt }
}

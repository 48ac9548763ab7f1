import { noiseOf } from './curve'
import type { Sample } from './types'

/** Final level of a step-up with its standard uncertainty, and how much of it the record reached. */
export type Steady = { level: number; standardUncertainty: number; reachedShare: number }

type Fit = { sse: number; level: number; levelVariance: number; count: number }

/**
 * Shared level L and own amplitudes of C_r = L − B_r e^(−λ (t − t0)) at one λ. The amplitudes are eliminated, so that L is a quotient of
 * sums and any number of records costs one pass.
 */
function fitAtRate(records: readonly (readonly Sample[])[], originS: number, ratePerS: number): Fit | null {
  let [numerator, denominator, ss, count] = [0, 0, 0, 0]
  for (const samples of records) {
    let [se, see, sy, sey, syy] = [0, 0, 0, 0, 0]
    for (const [timeS, value] of samples) {
      const e = Math.exp(-ratePerS * (timeS - originS))
      se += e
      see += e * e
      sy += value
      sey += e * value
      syy += value * value
    }
    numerator += sy - (se * sey) / see
    denominator += samples.length - (se * se) / see
    ss += syy - (sey * sey) / see
    count += samples.length
  }
  if (!(denominator > 1e-9 * count)) return null
  const level = numerator / denominator
  return { sse: ss - level * numerator, level, levelVariance: 1 / denominator, count }
}

/** Averages of neighbouring samples, at most about eighty: enough for a smooth late record, and quick. */
function binned(samples: readonly Sample[]): Sample[] {
  const size = Math.ceil(samples.length / 80)
  const out: Sample[] = []
  for (let i = 0; i + size <= samples.length; i += size) {
    const part = samples.slice(i, i + size)
    const sum = part.reduce((a, [t, value]) => [a[0] + t, a[1] + value] as [number, number], [0, 0])
    out.push([sum[0] / size, sum[1] / size])
  }
  return out
}

/** Best λ by a scan and a golden-section search on the sum of squares. */
function fitWindow(records: readonly (readonly Sample[])[], fromS: number, endS: number): Fit | null {
  const span = endS - fromS
  const sse = (ln: number) => fitAtRate(records, fromS, Math.exp(ln))?.sse ?? Number.POSITIVE_INFINITY
  const lowest = Math.log(0.5 / span)
  const width = Math.log(40 / 0.5) / 24
  let best = lowest
  for (let i = 1; i <= 24; i++) if (sse(lowest + i * width) < sse(best)) best = lowest + i * width
  let [low, high] = [best - width, best + width]
  for (let i = 0; i < 24; i++) {
    const a = high - 0.618034 * (high - low)
    const b = low + 0.618034 * (high - low)
    if (sse(a) < sse(b)) high = b
    else low = a
  }
  return fitAtRate(records, fromS, Math.exp((low + high) / 2))
}

/** Starts of the late part, as shares of the record's length: the earliest that an exponential describes to within noise is used. */
const LATE_STARTS = [0.45, 0.65, 0.8]
const LEAST_SAMPLES = 8

/**
 * Final level of a step-up from the late part of the records, which share level and rate: C∞ − B e^(−λt), the slowest way in which a room
 * settles.
 * @param records tidy records of one test
 * @returns null when the records have fewer than eight samples after the step
 */
export function fitSteady(records: readonly (readonly Sample[])[]): Steady | null {
  const after = records
    .map((samples) => samples.filter(([timeS]) => timeS > 0))
    .filter((one) => one.length > 0)
  if (after.length === 0 || Math.max(...after.map((one) => one.length)) < LEAST_SAMPLES) return null
  const endS = Math.max(...after.map((samples) => samples.at(-1)![0]))
  const noise = Math.max(...after.map((samples) => noiseOf(samples.map(([, value]) => value))))
  const scale = Math.max(...after.flat().map(([, value]) => Math.abs(value)))
  const fits = LATE_STARTS.flatMap((start) => {
    const late = after.map((samples) => samples.filter(([timeS]) => timeS >= start * endS))
    const perBin = Math.ceil(Math.max(...late.map((samples) => samples.length)) / 80)
    const used = late.map(binned).filter((samples) => samples.length >= 3)
    if (used.length === 0) return []
    const fit = fitWindow(used, start * endS, endS)
    return fit && fit.count >= LEAST_SAMPLES ? [{ fit, variance: noise ** 2 / perBin, used }] : []
  })
  if (fits.length === 0) return null
  const isGood = ({ fit, variance }: (typeof fits)[number]) =>
    fit.sse <= fit.count * (1 + 3 / Math.sqrt(fit.count)) * Math.max(variance, (1e-5 * scale) ** 2)
  const index = fits.findIndex(isGood)
  const chosen = fits[index === -1 ? fits.length - 1 : index]!
  const { level, levelVariance } = chosen.fit
  const others = fits.map(({ fit }) => Math.abs(fit.level - level))
  // a window that describes the record need not be doubted for what others say; one that does not is doubted by their spread
  const windowDoubt = index === -1 ? Math.max(...others) / 2 : 0
  const last = chosen.used.map((samples) => samples.at(-1)![1])
  // the more of the level is extrapolated, the less the last exponential can be trusted
  const beyond = Math.max(...last.map((value) => Math.abs(level - value)))
  const size = Math.max(Math.abs(level), 1e-300)
  const extrapolationDoubt = (0.03 + beyond / size) * beyond
  const rateDoubt = 1.8 * Math.sqrt(chosen.variance * levelVariance)
  return {
    level,
    standardUncertainty: Math.hypot(rateDoubt, windowDoubt, extrapolationDoubt),
    reachedShare: 1 - beyond / size,
  }
}

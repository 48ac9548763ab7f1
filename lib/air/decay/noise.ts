/**
 * How far readings stray from the room's mean, on the scale of minutes. Two parts: the sensor's white noise, and air that is not perfectly mixed,
 * which grows with the excess and lasts for minutes. A slow part costs more than its size says: what counts for a rate is the long-run
 * variance, size squared times (1 + phi) / (1 - phi). Bins carry that, so that sums of squares can be compared as if bins were independent.
 */
import { MIXING } from '@/lib/air/constants'
import type { Binned, PiecewiseFit } from './piecewise'

/** Bins with standard deviations on the long-run scale; a bin is as wide as the time to the next. `slowSdPpm` belongs to five-minute means. */
export function withMixing(data: Binned, backgroundPpm: number, slowSdPpm = 0): Binned {
  const n = data.timeH.length
  const sdPpm = data.sdPpm.map((sd, i) => {
    const k = Math.min(i, n - 2)
    const widthS = k >= 0 ? 3600 * (data.timeH[k + 1]! - data.timeH[k]!) : MIXING.correlationS
    const phi = Math.exp(-Math.min(widthS, 3600) / MIXING.correlationS)
    const share = MIXING.share * Math.sqrt((1 + phi) / (1 - phi)) * averaging(widthS / MIXING.correlationS)
    const slow = slowSdPpm * Math.sqrt(300 / Math.max(60, widthS))
    return Math.hypot(sd, slow, share * Math.max(0, data.ppm[i]! - backgroundPpm))
  })
  return { ...data, sdPpm }
}

/** What is left of a bin's slow noise beyond independent bins when the bin is wider than its correlation time. */
function averaging(widths: number): number {
  return widths <= 1 ? 1 : Math.sqrt(2 / (1 + widths))
}

export type Scale = {
  /** long-run variance of the residuals relative to what `withMixing` expects, drawn towards 1 */
  variance: number
  /** how many independent values it rests on, the prior's included */
  degreesOfFreedom: number
}

/**
 * Long-run variance of residuals from sums over blocks about two correlation times long (batch means), with the expected value as a prior worth
 * `MIXING.priorDegrees` blocks, because a short record says little of its own noise.
 */
export function longRunScale(fit: PiecewiseFit, data: Binned): Scale {
  const n = data.timeH.length
  const blockH = (2 * MIXING.correlationS) / 3600
  let blocks = 0
  let sum = 0
  let start = 0
  let total = 0
  for (let i = 0; i <= n; i++) {
    const full = i === n || data.timeH[i]! - data.timeH[start]! > blockH
    if (full && i > start) {
      total += (sum * sum) / (i - start)
      blocks++
      sum = 0
      start = i
    }
    if (i < n) sum += fit.residuals[i]!
  }
  const unknowns = fit.ratesPerHour.length + fit.breaksH.length + 1.3
  const own = Math.max(0, blocks - unknowns)
  // what the fit has taken up is given back in proportion, as far as blocks are left
  const variance = own > 0 ? total / own : 1
  const degrees = MIXING.priorDegrees + own
  const shrunk = (MIXING.priorDegrees + own * Math.min(variance, 25)) / degrees
  return { variance: Math.max(MIXING.leastVariance, shrunk), degreesOfFreedom: degrees }
}

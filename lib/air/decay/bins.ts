/** Readings gathered into bins of equal width: fewer points, whiter noise, the same decay rate. */
import type { CleanRecord } from './clean'
import { indexAt } from './clean'
import type { Binned } from './piecewise'

/**
 * Means of the readings in bins of `widthS` (growing by `growth` times the elapsed time: a decay is steep at first and flat later) from `fromS` to `toS`; empty bins are left out, never filled. Times are hours from `originS`, at the
 * mean instant of the readings. The mean of an exponential over a bin is the exponential times a constant, so the rate is unharmed.
 */
export function binRecord(
  record: CleanRecord,
  fromS: number,
  toS: number,
  widthS: number,
  originS: number,
  growth = 0,
): Binned {
  const timeH: number[] = []
  const ppm: number[] = []
  const sdPpm: number[] = []
  let i = indexAt(record.timeS, fromS)
  let endS = fromS
  while (i < record.timeS.length && record.timeS[i]! <= toS) {
    while (endS <= record.timeS[i]!) endS += widthS + growth * (endS - fromS)
    let count = 0
    let sumT = 0
    let sum = 0
    while (i < record.timeS.length && record.timeS[i]! <= toS) {
      if (record.timeS[i]! >= endS) break
      sumT += record.timeS[i]! - originS
      sum += record.ppm[i]!
      count++
      i++
    }
    timeH.push(sumT / count / 3600)
    ppm.push(sum / count)
    // quantisation does not average out while noise is smaller than the step
    const quantised = record.resolutionPpm / Math.sqrt(12)
    const floor = record.sigmaPpm < 0.5 * record.resolutionPpm ? quantised : 0.25 * quantised
    sdPpm.push(Math.max(record.sigmaPpm / Math.sqrt(count), floor))
  }
  return { timeH: Float64Array.from(timeH), ppm: Float64Array.from(ppm), sdPpm: Float64Array.from(sdPpm) }
}

/** The part of binned readings between two instants (hours, both included). */
export function sliceBins(data: Binned, fromH: number, toH: number): Binned {
  let low = 0
  while (low < data.timeH.length && data.timeH[low]! < fromH - 1e-9) low++
  let high = low
  while (high < data.timeH.length && data.timeH[high]! <= toH + 1e-9) high++
  return {
    timeH: data.timeH.subarray(low, high),
    ppm: data.ppm.subarray(low, high),
    sdPpm: data.sdPpm.subarray(low, high),
  }
}

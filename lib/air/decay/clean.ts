/** From what a sensor sent to what may be fitted: duplicates, impossible values, spikes, stuck and saturated stretches out. Nothing is filled. */

import { DEFAULT_SENSOR, PLAUSIBLE_PPM } from '@/lib/air/constants'
import type { SensorSpec, Series } from '@/lib/air/types'
import { median, quantile, quantileSorted } from '@/lib/math/robust'

/** Statistics of a long record are taken from about so many of its readings. */
const SAMPLED = 500

export type Interval = { fromS: number; toS: number }

export type CleanRecord = {
  timeS: Float64Array
  ppm: Float64Array
  /** median time between readings, seconds */
  stepS: number
  /** standard deviation of one reading: noise and resolution, ppm */
  sigmaPpm: number
  /** noise that lasts for minutes at any level, as its deviation in five-minute means, ppm; 0 where not looked for */
  slowSdPpm: number
  resolutionPpm: number
  onChange: boolean
  deadbandPpm: number
  saturated: Interval[]
  stuck: Interval[]
  /** readings at one instant that contradict each other: a clock that was set back */
  clockClashes: number[]
  spikes: number
}

function sortedUnique(series: Series): { timeS: number[]; ppm: number[]; clashes: number[] } {
  const n = series.timeS.length
  let order: number[] | null = null
  for (let i = 1; i < n; i++) {
    if (series.timeS[i]! < series.timeS[i - 1]!) {
      order = Array.from({ length: n }, (_, k) => k).sort((a, b) => series.timeS[a]! - series.timeS[b]!)
      break
    }
  }
  const timeS: number[] = []
  const ppm: number[] = []
  const clashes: number[] = []
  for (let k = 0; k < n; k++) {
    const i = order ? order[k]! : k
    const t = series.timeS[i]!
    const value = series.co2Ppm[i]!
    if (!Number.isFinite(t) || !Number.isFinite(value)) continue
    if (value < PLAUSIBLE_PPM.low || value > PLAUSIBLE_PPM.high) continue
    if (timeS.length > 0 && t === timeS[timeS.length - 1]) {
      if (Math.abs(value - ppm[ppm.length - 1]!) > 30) clashes.push(t)
      continue
    }
    timeS.push(t)
    ppm.push(value)
  }
  return { timeS, ppm, clashes }
}

/** The step between values the sensor can show, from the smallest differences seen; `declared` wins. */
export function seenResolution(ppm: ArrayLike<number>, declared?: number): number {
  if (declared && declared > 0) return declared
  const steps: number[] = []
  const stride = Math.max(1, Math.floor(ppm.length / SAMPLED))
  for (let i = 1; i < ppm.length; i += stride) {
    const d = Math.abs(ppm[i]! - ppm[i - 1]!)
    if (d > 1e-6) steps.push(d)
  }
  return steps.length < 20 ? DEFAULT_SENSOR.resolutionPpm : Math.max(1e-3, quantile(steps, 0.02))
}

/** Standard deviation of a reading from second differences (a straight course drops out), never below what the resolution costs. */
export function readingNoise(ppm: ArrayLike<number>, resolutionPpm: number): number {
  const second: number[] = []
  const stride = Math.max(1, Math.floor(ppm.length / SAMPLED))
  for (let i = 1; i + 1 < ppm.length; i += stride)
    second.push(Math.abs(ppm[i + 1]! - 2 * ppm[i]! + ppm[i - 1]!))
  const quantised = resolutionPpm / Math.sqrt(12)
  if (second.length < 10) return Math.max(3, quantised)
  // a coarse resolution makes the median zero; the 84th percentile of |d| is one deviation for a normal variable too
  const sorted = Float64Array.from(second).sort()
  const byMedian = (1.4826 * quantileSorted(sorted, 0.5)) / Math.sqrt(6)
  const byTail = quantileSorted(sorted, 0.6827) / Math.sqrt(6)
  return Math.max(byMedian, Math.min(byTail, 2 * resolutionPpm), quantised, 0.7)
}

/** Single readings that stand out from both neighbours while the neighbours agree (Hampel 1974, window of five). */
function dropSpikes(timeS: number[], ppm: number[], sigma: number): number {
  const keep: boolean[] = ppm.map(() => true)
  let spikes = 0
  const around = new Float64Array(5)
  for (let i = 2; i + 2 < ppm.length; i++) {
    const own = ppm[i]!
    if (Math.abs(own - ppm[i - 1]!) < 6 * sigma + 15 || Math.abs(own - ppm[i + 1]!) < 6 * sigma + 15) continue
    for (let k = 0; k < 5; k++) around[k] = ppm[i + k - 2]!
    const centre = median(around)
    const spread = 1.4826 * median(around.map((value) => Math.abs(value - centre)))
    if (Math.abs(own - centre) > Math.max(4 * spread, 6 * sigma + 15)) {
      keep[i] = false
      spikes++
    }
  }
  if (spikes > 0) {
    let kept = 0
    for (let i = 0; i < ppm.length; i++) {
      if (!keep[i]) continue
      timeS[kept] = timeS[i]!
      ppm[kept++] = ppm[i]!
    }
    timeS.length = kept
    ppm.length = kept
  }
  return spikes
}

/** Stretches where one value repeats for so long that the sensor, not the air, must stand still. */
function stuckStretches(timeS: number[], ppm: number[], resolution: number, sigma: number): Interval[] {
  const found: Interval[] = []
  const stride = Math.max(1, Math.floor(ppm.length / SAMPLED))
  const floor = quantile(
    ppm.filter((_, i) => i % stride === 0),
    0.05,
  )
  let start = 0
  for (let i = 1; i <= ppm.length; i++) {
    if (i < ppm.length && Math.abs(ppm[i]! - ppm[start]!) < 1e-9) continue
    const seconds = timeS[i - 1]! - timeS[start]!
    const readings = i - start
    // near the floor a coarse or quiet sensor may well repeat itself
    const limit = ppm[start]! > floor + Math.max(120, 6 * resolution) ? 2700 : 5 * 3600
    const quiet = sigma < 0.6 * resolution
    if (readings >= 8 && seconds >= limit * (quiet ? 2 : 1))
      found.push({ fromS: timeS[start]!, toS: timeS[i - 1]! })
    start = i
  }
  return found
}

function saturatedStretches(timeS: number[], ppm: number[], rangeMax: number | undefined): Interval[] {
  if (!rangeMax) return []
  const found: Interval[] = []
  for (let i = 0; i < ppm.length; i++) {
    if (ppm[i]! < rangeMax) continue
    const last = found[found.length - 1]
    if (last && i > 0 && last.toS === timeS[i - 1]!) last.toS = timeS[i]!
    else found.push({ fromS: timeS[i]!, toS: timeS[i]! })
  }
  return found
}

function without(timeS: number[], ppm: number[], intervals: readonly Interval[]): void {
  if (intervals.length === 0) return
  let kept = 0
  for (let i = 0; i < ppm.length; i++) {
    if (intervals.some((cut) => timeS[i]! >= cut.fromS && timeS[i]! <= cut.toS)) continue
    timeS[kept] = timeS[i]!
    ppm[kept++] = ppm[i]!
  }
  timeS.length = kept
  ppm.length = kept
}

/** Cleans one record. Instants may come unsorted and doubled; the result rises strictly. */
export function cleanRecord(series: Series, sensor: SensorSpec = {}): CleanRecord {
  const { timeS, ppm, clashes } = sortedUnique(series)
  const resolutionPpm = seenResolution(ppm, sensor.resolutionPpm)
  const sigmaPpm = readingNoise(ppm, resolutionPpm)
  const onChange = sensor.reporting === 'on-change'
  const saturated = saturatedStretches(timeS, ppm, sensor.rangeMaxPpm)
  without(timeS, ppm, saturated)
  const stuck = onChange ? [] : stuckStretches(timeS, ppm, resolutionPpm, sigmaPpm)
  without(timeS, ppm, stuck)
  const spikes = onChange ? 0 : dropSpikes(timeS, ppm, sigmaPpm)
  const stride = Math.max(1, Math.floor(timeS.length / SAMPLED))
  const steps: number[] = []
  for (let i = 1; i < timeS.length; i += stride) steps.push(timeS[i]! - timeS[i - 1]!)
  return {
    timeS: Float64Array.from(timeS),
    ppm: Float64Array.from(ppm),
    stepS: steps.length > 0 ? median(steps) : 60,
    sigmaPpm,
    slowSdPpm: 0,
    resolutionPpm,
    onChange,
    deadbandPpm: sensor.deadbandPpm ?? (onChange ? 10 : 0),
    saturated,
    stuck,
    clockClashes: clashes,
    spikes,
  }
}

/** Index of the first reading at or after an instant. */
export function indexAt(timeS: Float64Array, t: number): number {
  let low = 0
  let high = timeS.length
  while (low < high) {
    const middle = (low + high) >> 1
    if (timeS[middle]! < t) low = middle + 1
    else high = middle
  }
  return low
}

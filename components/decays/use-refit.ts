'use client'

import { useMemo } from 'react'
import { type Refit, refitDecay } from '@/lib/air/decay/refit'
import type { DecayDetail } from '@/lib/wire/decays'

export type Window = { fromS: number; toS: number }

/** What the page draws of a fit: its course with the 95 % band, and what is left over in the window, ppm. */
export type Curve = {
  timeS: number[]
  fitPpm: number[]
  lowPpm: number[]
  highPpm: number[]
  beforeS: number[]
  beforePpm: number[]
  afterS: number[]
  afterPpm: number[]
  leftOverS: number[]
  leftOverPpm: number[]
}

const curveSteps = 60

/** Fits the window anew as the hand moves it: the same code as the nightly job. */
export function useRefit(decay: DecayDetail, window: Window): { refit: Refit; curve: Curve | null } {
  return useMemo(() => {
    const series = {
      timeS: Float64Array.from(decay.series.timeS),
      co2Ppm: Float64Array.from(decay.series.co2Ppm),
    }
    const refit = refitDecay({
      series,
      fromS: window.fromS,
      toS: window.toS,
      background: decay.background && { ...decay.background, origin: decay.background.origin as never },
      sensor: decay.sensorSpec,
    })
    return { refit, curve: curveOf(decay, refit, window) }
  }, [decay, window])
}

function curveOf(decay: DecayDetail, refit: Refit, { fromS, toS }: Window): Curve | null {
  const { background, ratePerHour: rate, excessAtStartPpm: excess, startS, middleS, driftPpmPerHour } = refit
  if (background === null || rate === null || excess === null) return null
  // the formula of refitDecay: the background moves while the room ebbs towards it
  const floorAt = (timeS: number) => background.ppm + (driftPpmPerHour * (timeS - middleS)) / 3600
  const at = (timeS: number) => floorAt(timeS) + excess * Math.exp((-rate * (timeS - startS)) / 3600)
  const spread = (low: number, high: number) =>
    Array.from({ length: curveSteps + 1 }, (_, i) => low + ((high - low) * i) / curveSteps)
  const timeS = spread(fromS, toS)
  // both ends of the interval turn round the middle of what was fitted, where the level is known best
  const pivotS = fromS + (toS - fromS) / 3
  const turned = (other: number | null) => (t: number) =>
    floorAt(t) + (at(pivotS) - floorAt(pivotS)) * Math.exp((-(other ?? rate) * (t - pivotS)) / 3600)
  const edges = timeS.map((t) => [turned(refit.highPerHour)(t), turned(refit.lowPerHour)(t)] as const)
  const inside = decay.series.timeS
    .map((t, i) => [t, decay.series.co2Ppm[i] ?? 0] as const)
    .filter(([t]) => t >= fromS && t <= toS)
  const beforeS = spread(fromS - 20 * 60, fromS)
  const afterS = spread(toS, toS + 30 * 60)
  return {
    timeS,
    fitPpm: timeS.map(at),
    lowPpm: edges.map(([a, b]) => Math.min(a, b)),
    highPpm: edges.map(([a, b]) => Math.max(a, b)),
    beforeS,
    beforePpm: beforeS.map(at),
    afterS,
    afterPpm: afterS.map(at),
    leftOverS: inside.map(([t]) => t),
    leftOverPpm: inside.map(([t, c]) => c - at(t)),
  }
}

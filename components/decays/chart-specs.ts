import type { ChartSpec, ChartTableData } from '@/components/charts/types'
import { localClock } from '@/lib/time'
import type { DecayDetail } from '@/lib/wire/decays'
import type { Curve, Window } from './use-refit'

const least = 5

/** Readings as points, filled inside the window, open outside; `above` takes the background away. */
function pointsOf(
  decay: DecayDetail,
  window: Window,
  above: number | null,
): NonNullable<ChartSpec['points']> {
  const used = { look: 'used' as const, timeS: [] as number[], values: [] as number[] }
  const open = { look: 'not used' as const, timeS: [] as number[], values: [] as number[] }
  decay.series.timeS.forEach((t, i) => {
    const value = (decay.series.co2Ppm[i] ?? 0) - (above ?? 0)
    if (above !== null && value < least) return
    const into = t >= window.fromS && t <= window.toS ? used : open
    into.timeS.push(t)
    into.values.push(value)
  })
  return [open, used]
}

/** Linear chart: readings, fit and background. */
export function linearSpec(
  decay: DecayDetail,
  window: Window,
  curve: Curve | null,
  backgroundPpm: number | null,
): ChartSpec {
  return {
    points: pointsOf(decay, window, null),
    lines: curve ? [{ look: 'fit', timeS: curve.timeS, values: curve.fitPpm }] : [],
    levels:
      backgroundPpm === null
        ? []
        : [
            {
              look: 'background',
              value: backgroundPpm,
              label: `background ${Math.round(backgroundPpm)}`,
              labelInside: true,
            },
          ],
    uprights:
      decay.lastPersonLeftS === null
        ? []
        : [{ look: 'note', atS: decay.lastPersonLeftS, words: 'last person left' }],
  }
}

/** Semi-log chart: CO2 above background, where a constant rate is a straight line. */
export function logSpec(
  decay: DecayDetail,
  window: Window,
  curve: Curve | null,
  backgroundPpm: number | null,
): ChartSpec {
  if (backgroundPpm === null) return {}
  const above = (values: readonly number[]) => values.map((value) => Math.max(least, value - backgroundPpm))
  return {
    points: pointsOf(decay, window, backgroundPpm),
    lines: curve
      ? [
          { look: 'fit', timeS: curve.timeS, values: above(curve.fitPpm) },
          { look: 'fit beyond', timeS: curve.beforeS, values: above(curve.beforePpm) },
          { look: 'fit beyond', timeS: curve.afterS, values: above(curve.afterPpm) },
        ]
      : [],
    ...(curve ? { band: { timeS: curve.timeS, low: above(curve.lowPpm), high: above(curve.highPpm) } } : {}),
    uprights:
      decay.rateChangeS === null ? [] : [{ look: 'change', atS: decay.rateChangeS, words: 'rate changes' }],
    levels: [{ look: 'floor', value: 50, label: '50 ppm' }],
  }
}

/** What is left over after the fit, on the log chart's time axis. */
export function leftOverSpec(curve: Curve | null): ChartSpec {
  return {
    levels: [{ look: 'zero', value: 0 }],
    ...(curve ? { stems: { timeS: curve.leftOverS, values: curve.leftOverPpm } } : {}),
  }
}

/** Low and high end of the linear axis: from 400, or lower where the readings go. */
export function linearEnds(decay: DecayDetail): { low: number; high: number } {
  const values = decay.series.co2Ppm
  const low = Math.min(400, ...values)
  const high = Math.max(600, ...values)
  return { low: Math.floor(low / 50) * 50, high: Math.ceil(high / 200) * 200 }
}

/** The readings as a table, for those who read rather than look. */
export function readingsTable(decay: DecayDetail, window: Window, timeZone: string): ChartTableData {
  return {
    caption: 'Readings of this decay',
    columns: ['Time', 'CO2, ppm', 'In the fit'],
    rows: decay.series.timeS.map((t, i) => [
      localClock(t, timeZone),
      String(Math.round(decay.series.co2Ppm[i] ?? 0)),
      t >= window.fromS && t <= window.toS ? 'yes' : 'no',
    ]),
  }
}

import type { ChartSpec, ChartTableData, Line, ValueAxis } from '@/components/charts/types'
import { zonedStamp } from '@/lib/format/clock'
import { counted, countWord, sentenceCase } from '@/lib/format/counts'
import type { SupplySpan } from '@/lib/format/supply-spans'
import { intervalWords, rateText } from '@/lib/format/verdict'
import type { ChartPoint, RoomDecay, RoomSeries } from '@/lib/wire/rooms'

/** Points as a line that breaks where readings are missing. */
export function lineOf(
  points: readonly ChartPoint[],
  gapS: number,
  look: Line['look'],
  label?: string,
): Line {
  const timeS: number[] = []
  const values: (number | null)[] = []
  points.forEach(([t, c], i) => {
    const before = points[i - 1]
    if (before && t - before[0] > gapS) {
      timeS.push((before[0] + t) / 2)
      values.push(null)
    }
    timeS.push(t)
    values.push(c)
  })
  return { look, timeS, values, label }
}

const isKept = ({ quality }: RoomDecay) => quality !== 'refused'

/** What the CO2 chart of a room draws. */
export function roomChartSpec(
  series: RoomSeries,
  decays: readonly RoomDecay[],
  supply: readonly SupplySpan[],
  limitPpm: number,
  rates: boolean,
): ChartSpec {
  return {
    lines: [
      lineOf(series.points, series.gapS, 'measured'),
      lineOf(series.outdoor, Math.max(series.gapS, 7200), 'outdoor', 'outdoor'),
    ],
    levels: [{ look: 'limit', value: limitPpm, label: 'limit' }],
    areas: decays.map((decay) => ({
      look: isKept(decay) ? 'kept' : 'left out',
      fromS: decay.startS,
      toS: decay.endS,
    })),
    lanes: [
      {
        label: rates ? 'decays' : 'emptying',
        items: decays.map((decay) => ({
          look: isKept(decay) ? 'kept' : 'left out',
          fromS: decay.startS,
          toS: decay.endS,
          words: decay.sentence,
        })),
      },
    ],
    supply,
  }
}

/** From 400 ppm (or lower where the record is) to a round value above record and limit. */
export function roomChartAxis(series: RoomSeries, limitPpm: number): ValueAxis {
  const values = series.points.map(([, ppm]) => ppm)
  const highest = values.reduce((a, b) => Math.max(a, b), limitPpm)
  const lowest = values.reduce((a, b) => Math.min(a, b), 400)
  return { low: Math.floor(lowest / 100) * 100, high: Math.ceil((highest * 1.06) / 200) * 200 }
}

/** "Twelve decays found: eleven kept (hatched), one left out (pale hatch)."; for tenants in words without decays. */
export function decayCaption(decays: readonly RoomDecay[], rates: boolean): string {
  const kept = decays.filter(isKept).length
  if (!rates)
    return kept === 0
      ? 'The room was not seen emptying in this time.'
      : `Hatched: the room emptying after people left, ${counted(kept, 'time')}.`
  if (decays.length === 0) return 'No decay found in this time.'
  const left = decays.length - kept
  const parts = [
    kept > 0 && `${countWord(kept)} kept (hatched)`,
    left > 0 && `${countWord(left)} left out (pale hatch)`,
  ]
  return `${sentenceCase(counted(decays.length, 'decay'))} found: ${parts.filter(Boolean).join(', ')}.`
}

/** Stretches with the lowest and highest reading of each, newest first; a decay in one is named. */
export function readingsTable(
  series: RoomSeries,
  decays: readonly RoomDecay[],
  timeZone: string,
  rates: boolean,
): ChartTableData {
  const spanS = series.toS - series.fromS
  const stretchS = spanS <= 90_000 ? 3600 : spanS <= 700_000 ? 6 * 3600 : 86_400
  const stretches = new Map<number, { low: number; high: number }>()
  for (const [t, c] of series.points) {
    const start = Math.floor(t / stretchS) * stretchS
    const known = stretches.get(start) ?? { low: c, high: c }
    stretches.set(start, { low: Math.min(known.low, c), high: Math.max(known.high, c) })
  }
  const rows = [...stretches].reverse().map(([start, { low, high }]) => {
    const { day, clock } = zonedStamp(start, timeZone)
    const inside = decays.filter(({ startS }) => startS >= start && startS < start + stretchS)
    return [
      `${day} ${clock}`,
      String(Math.round(low)),
      String(Math.round(high)),
      inside.map((decay) => decayCell(decay, rates)).join('; '),
    ]
  })
  return {
    caption: 'CO2 by stretches of time',
    columns: ['From', 'Lowest, ppm', 'Highest, ppm', rates ? 'Decays begun, rate per hour' : 'Emptied'],
    rows,
  }
}

function decayCell(decay: RoomDecay, rates: boolean): string {
  if (decay.quality === 'refused') return rates ? 'left out' : ''
  if (!rates) return 'yes'
  return decay.rate === null ? intervalWords(decay.rateLow, decay.rateHigh, rateText) : rateText(decay.rate)
}

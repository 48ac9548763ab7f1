'use client'

import { useMemo } from 'react'
import { TimeChart } from '@/components/charts/TimeChart'
import type { ChartSpec, ChartTableData } from '@/components/charts/types'
import { FigureHead } from '@/components/ui/Page'
import { longDate } from '@/lib/format/clock'
import { intervalWords, rateText } from '@/lib/format/verdict'
import { localToEpochS } from '@/lib/time'
import type { RoomChange, RoomWeek } from '@/lib/wire/rooms'

type Props = {
  weeks: readonly RoomWeek[]
  changes: readonly RoomChange[]
  basisRatePerHour: number | null
  timeZone: string
  roomName: string
}

const WEEK_S = 7 * 86_400
const occupied = new Set(['supply on', 'natural'])

const isDrawn = ({ mode, low, high, rate }: RoomWeek) => mode !== 'unknown' && (low ?? high ?? rate) !== null

/** What the chart draws: weeks as dots or rings with their intervals, the basis, and where the rate changed. */
function historySpec({ weeks, changes, basisRatePerHour, timeZone }: Omit<Props, 'roomName'>): ChartSpec {
  const at = (date: string) => localToEpochS(date, '12:00', timeZone)
  const drawn = weeks.filter(isDrawn)
  const newestOf = (isOccupied: boolean) => drawn.findLast(({ mode }) => occupied.has(mode) === isOccupied)
  return {
    intervals: drawn.map((week) => ({
      look: occupied.has(week.mode) ? 'dot' : 'ring',
      // the middle of the week that the figure speaks for
      atS: at(week.weekStart) + WEEK_S / 2 - 43_200,
      value: week.rate,
      low: week.low,
      high: week.high,
    })),
    levels:
      basisRatePerHour === null
        ? []
        : [{ look: 'basis', value: basisRatePerHour, label: `basis ${rateText(basisRatePerHour)}` }],
    uprights: changes.map((change) => ({
      look: change.ratio < 1 ? 'change' : 'note',
      atS: at(change.onNight),
      words: changeWords(change),
    })),
    endLabels: [newestOf(true), newestOf(false)].flatMap((week) => {
      const value = week?.rate ?? week?.low ?? week?.high
      return week && value !== null && value !== undefined
        ? [{ value, words: week.mode, tone: 'tide' as const }]
        : []
    }),
  }
}

/** "rate fell 48 %, 10 November" */
function changeWords({ ratio, onNight }: RoomChange): string {
  const share = Math.round(Math.abs(1 - ratio) * 100)
  return `rate ${ratio < 1 ? 'fell' : 'rose'} ${share} %, ${longDate(onNight, onNight.slice(0, 4))}`
}

/** Air-change rate of each week with its interval, the basis as a line, and where the rate changed. */
export function RateHistory({ weeks, changes, basisRatePerHour, timeZone, roomName }: Props) {
  const spec = useMemo(
    () => historySpec({ weeks, changes, basisRatePerHour, timeZone }),
    [weeks, changes, basisRatePerHour, timeZone],
  )
  const axis = useMemo(() => {
    const tops = weeks.filter(isDrawn).map(({ high, rate }) => high ?? rate ?? 0)
    return { low: 0, high: niceTop(Math.max(basisRatePerHour ?? 0, ...tops) * 1.12), most: 6 }
  }, [weeks, basisRatePerHour])
  const first = weeks[0]
  const last = weeks[weeks.length - 1]
  if (!first || !last) return <NoHistory />
  const at = (date: string) => localToEpochS(date, '12:00', timeZone)
  return (
    <section className="mt-12 max-sm:mt-9">
      <FigureHead title="Air-change rate by week, per hour" />
      <TimeChart
        label={`Air-change rate of ${roomName} by week with 95 % intervals`}
        spec={spec}
        axis={axis}
        fromS={at(first.weekStart) - WEEK_S / 4}
        toS={at(last.weekStart) + WEEK_S}
        timeZone={timeZone}
        heightPx={236}
        table={tableOf(weeks, last.weekStart.slice(0, 4))}
      />
      <p className="mt-1 text-2 text-ink-3">
        Dot: the week’s rate. Bar: where the true rate lies, 95 times in 100. Ring: supply reduced or off.
      </p>
    </section>
  )
}

function NoHistory() {
  return (
    <section className="mt-12 max-sm:mt-9">
      <FigureHead title="Air-change rate by week, per hour" />
      <p className="border-t border-rule pt-3 text-2 text-ink-2">
        No week has a figure yet. The first comes in the night after people have left the room and its level
        has ebbed.
      </p>
    </section>
  )
}

/** A round end of the scale just above. */
function niceTop(value: number): number {
  const step = value > 12 ? 5 : value > 5 ? 2 : value > 2 ? 1 : 0.5
  return Math.max(step, Math.ceil(value / step) * step)
}

function tableOf(weeks: readonly RoomWeek[], year: string): ChartTableData {
  return {
    caption: 'Air-change rate by week',
    columns: ['Week of', 'Mode', 'Rate, per hour', '95 % interval', 'Decays', 'Left out'],
    rows: [...weeks]
      .reverse()
      .map((week) => [
        longDate(week.weekStart, year),
        week.mode,
        week.rate === null ? '–' : rateText(week.rate),
        intervalWords(week.low, week.high, rateText),
        String(week.decays),
        String(week.decaysRefused),
      ]),
  }
}

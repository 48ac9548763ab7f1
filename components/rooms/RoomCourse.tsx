'use client'

import { useBoard } from '@/components/live/use-board'
import type { FilterChoice } from '@/components/ui/Filters'
import { FigureHead } from '@/components/ui/Page'
import { spaced } from '@/lib/format/counts'
import type { SupplySpan } from '@/lib/format/supply-spans'
import type { Board } from '@/lib/wire/live-board'
import type { ChartPoint, RoomDecay, RoomSeries } from '@/lib/wire/rooms'
import { RoomChart } from './RoomChart'
import { TideLine } from './TideLine'

/** A room's record over one span: series, the decays in it, and when the supply was on. */
export type RoomRecord = { series: RoomSeries; decays: RoomDecay[]; supply: SupplySpan[] }

type Props = {
  board: Board
  roomId: string
  roomName: string
  day: RoomRecord
  span: RoomRecord
  ranges: readonly FilterChoice[]
  rates: boolean
}

/** Tide line of the day and the chart of the chosen span; both go on as readings arrive. */
export function RoomCourse({ board: initial, roomId, roomName, day, span, ranges, rates }: Props) {
  const { board } = useBoard(initial)
  const tile = board.rooms.find(({ id }) => id === roomId)
  if (!tile) return null
  const newest: ChartPoint | null =
    tile.live?.atS && tile.live.co2Ppm !== null && tile.live.state !== 'no signal'
      ? [tile.live.atS, tile.live.co2Ppm]
      : null
  const { timeZone } = board.building
  const { outdoorPpm, limitPpm } = tile
  return (
    <>
      <section>
        <FigureHead
          title="The last 24 hours"
          beside={
            <span className="text-2 text-ink-3">
              hatched where the room was emptying{day.supply.length > 0 && '; bar underneath, supply on'}
            </span>
          }
        />
        <TideLine
          series={withNewest(day.series, newest)}
          decays={day.decays}
          supply={day.supply}
          outdoorPpm={outdoorPpm}
          limitPpm={limitPpm}
          timeZone={timeZone}
          words={tideWords(roomName, day, limitPpm)}
        />
      </section>
      <RoomChart
        roomId={roomId}
        roomName={roomName}
        series={span.series}
        decays={span.decays}
        supply={span.supply}
        limitPpm={limitPpm}
        timeZone={timeZone}
        ranges={ranges}
        rates={rates}
        newest={newest}
      />
    </>
  )
}

function withNewest(series: RoomSeries, newest: ChartPoint | null): RoomSeries {
  const last = series.points[series.points.length - 1]
  if (!newest || !last || newest[0] <= last[0]) return series
  const by = Math.max(0, newest[0] - series.toS)
  return { ...series, fromS: series.fromS + by, toS: series.toS + by, points: [...series.points, newest] }
}

function tideWords(name: string, { series, decays }: RoomRecord, limitPpm: number): string {
  const highest = Math.max(...series.points.map(([, ppm]) => ppm))
  if (!Number.isFinite(highest)) return `No reading of ${name} in the last 24 hours`
  const over =
    highest > limitPpm ? `above the limit of ${spaced(limitPpm)}` : `below the limit of ${spaced(limitPpm)}`
  return `Last 24 hours in ${name}: highest ${spaced(highest)} ppm, ${over}; ${decays.length} times emptying`
}

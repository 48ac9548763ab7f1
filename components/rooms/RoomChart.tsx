'use client'

import { keepPreviousData, useQuery } from '@tanstack/react-query'
import { useCallback, useMemo, useState } from 'react'
import { TimeChart } from '@/components/charts/TimeChart'
import { type FilterChoice, Picks } from '@/components/ui/Filters'
import { FigureHead } from '@/components/ui/Page'
import { spaced } from '@/lib/format/counts'
import type { SupplySpan } from '@/lib/format/supply-spans'
import type { ChartPoint, RoomDecay, RoomSeries } from '@/lib/wire/rooms'
import { decayCaption, readingsTable, roomChartAxis, roomChartSpec } from './room-chart-spec'

export type RoomChartProps = {
  roomId: string
  roomName: string
  series: RoomSeries
  decays: readonly RoomDecay[]
  supply: readonly SupplySpan[]
  limitPpm: number
  timeZone: string
  ranges: readonly FilterChoice[]
  /** readers of air-change figures see them in the table */
  rates: boolean
  /** the newest reading as it arrives */
  newest: ChartPoint | null
}

/** Points asked for when zoomed in: about as many as a wide plot has pixels. */
const ZOOM_POINTS = 1200

async function fetchSeries(roomId: string, fromS: number, toS: number): Promise<RoomSeries> {
  const iso = (timeS: number) => new Date(timeS * 1000).toISOString()
  const query = new URLSearchParams({
    room: roomId,
    from: iso(fromS),
    to: iso(toS),
    points: String(ZOOM_POINTS),
  })
  const response = await fetch(`/api/v1/readings?${query}`)
  if (!response.ok) throw new Error(`The readings could not be read (${response.status}).`)
  return (await response.json()) as RoomSeries
}

/** CO2 of a room over a day, a week or four, with limit, outdoor level and decays; zooming in reads finer data. */
export function RoomChart(props: RoomChartProps) {
  const { roomId, series, decays, supply, limitPpm, timeZone, newest } = props
  const [view, setView] = useState<readonly [number, number] | null>(null)
  const onView = useCallback(
    (fromS: number, toS: number) =>
      setView(fromS === series.fromS && toS === series.toS ? null : [fromS, toS]),
    [series],
  )
  const zoom = useQuery({
    queryKey: ['readings', roomId, view],
    queryFn: () => fetchSeries(roomId, Math.floor(view?.[0] ?? 0), Math.ceil(view?.[1] ?? 0)),
    enabled: view !== null,
    placeholderData: keepPreviousData,
  })
  const shown = useMemo(() => {
    const base = view && zoom.data ? zoom.data : series
    const last = base.points[base.points.length - 1]
    const isNew = newest && !view && last && newest[0] > last[0]
    return isNew ? { ...base, points: [...base.points, newest] } : base
  }, [view, zoom.data, series, newest])
  const toS = view || !newest ? series.toS : Math.max(series.toS, newest[0])
  const spec = useMemo(
    () => roomChartSpec(shown, decays, supply, limitPpm, props.rates),
    [shown, decays, supply, limitPpm],
  )
  const axis = useMemo(() => roomChartAxis(series, limitPpm), [series, limitPpm])
  const table = useMemo(
    () => readingsTable(series, decays, timeZone, props.rates),
    [series, decays, timeZone, props.rates],
  )
  const readout = useCallback((timeS: number) => nearest(shown.points, timeS), [shown])
  return (
    <section className="mt-12 max-sm:mt-9">
      <FigureHead title="CO2, ppm" beside={<Picks label="Range" choices={props.ranges} />} />
      <TimeChart
        label={`CO2 in ${props.roomName}, with limit ${spaced(limitPpm)} ppm and outdoor level. ${decayCaption(decays, props.rates)}`}
        spec={spec}
        axis={axis}
        fromS={series.fromS}
        toS={toS}
        timeZone={timeZone}
        zoomable
        onView={onView}
        readout={readout}
        table={table}
      />
      <p className="mt-1 text-2 text-ink-3">
        {decayCaption(decays, props.rates)}{' '}
        <span className="pointer-coarse:hidden">Drag over the chart to look closer.</span>
      </p>
    </section>
  )
}

function nearest(points: readonly ChartPoint[], timeS: number): string | null {
  let best: ChartPoint | undefined
  for (const point of points)
    if (!best || Math.abs(point[0] - timeS) < Math.abs(best[0] - timeS)) best = point
  return best && Math.abs(best[0] - timeS) < 3 * 3600 ? `${spaced(best[1])} ppm` : null
}

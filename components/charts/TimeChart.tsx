'use client'

import 'uplot/dist/uPlot.min.css'
import { useCallback, useEffect, useRef, useState } from 'react'
import type uPlot from 'uplot'
import { cx } from '@/components/ui/cx'
import { ChartControls } from './ChartControls'
import { ChartTable } from './ChartTable'
import type { Live } from './plot'
import { plotData } from './plot-data'
import type { ChartSpec, ChartTableData, ChartWindow, ValueAxis } from './types'
import { usePlot } from './use-plot'
import { keyView, type View } from './view'
import { WindowHandles } from './WindowHandles'

export type TimeChartProps = {
  /** what the chart shows, in words, for those who do not see it */
  label: string
  spec: ChartSpec
  axis: ValueAxis
  fromS: number
  toS: number
  timeZone: string
  heightPx?: number
  window?: ChartWindow
  table?: ChartTableData
  /** drag, + and − zoom, arrows move, 0 shows the whole; the caller may fetch finer data for the new view */
  zoomable?: boolean
  onView?: (fromS: number, toS: number) => void
  /** how the value under the pointer reads, such as "812 ppm" */
  readout?: (timeS: number) => string | null
}

/** The one chart of the product. Bottom axis in the building's zone; without JavaScript its table stands in for it. */
export function TimeChart(props: TimeChartProps) {
  const { label, heightPx = 330, zoomable = false, timeZone, window, readout } = props
  const all: View = [props.fromS, props.toS]
  const [cursorS, setCursorS] = useState<number | null>(null)
  const { host, plot, view, show } = useChart(props, heightPx, setCursorS)
  const onKeyDown = (event: React.KeyboardEvent) => {
    const next = zoomable && event.target === event.currentTarget ? keyView(event.key, view, all) : null
    if (!next) return
    event.preventDefault()
    show(...next)
  }
  const words = cursorS === null ? null : readout?.(cursorS)
  return (
    <figure className="relative">
      {/* biome-ignore lint/a11y/useSemanticElements: a group of drawing and handles, not a fieldset */}
      <div
        role="group"
        aria-label={zoomable ? `${label}. Plus and minus zoom, arrow keys move, 0 shows all of it.` : label}
        tabIndex={zoomable ? 0 : undefined}
        onKeyDown={onKeyDown}
        onDoubleClick={() => show(...all)}
        className="relative"
        style={{ minHeight: heightPx }}
      >
        <div
          ref={host}
          aria-hidden="true"
          className={cx('[&_.u-select]:bg-wash-tide', !zoomable && '[&_.u-over]:pointer-events-none')}
        />
        {plot && window && <WindowHandles plot={plot} window={window} timeZone={timeZone} />}
      </div>
      <ChartControls
        zoomable={zoomable}
        view={view}
        all={all}
        show={show}
        cursor={words && cursorS !== null ? { timeS: cursorS, words } : null}
        timeZone={timeZone}
      />
      {props.table && <ChartTable table={props.table} />}
    </figure>
  )
}

/** Plot and view of a chart: what is seen of the whole, and the drawing that follows data, window and view. */
function useChart(props: TimeChartProps, heightPx: number, onCursor: (timeS: number | null) => void) {
  const { spec, axis, timeZone, window, zoomable, onView, fromS, toS } = props
  const host = useRef<HTMLDivElement>(null)
  const [plot, setPlot] = useState<uPlot | null>(null)
  const [view, setView] = useState<View>([fromS, toS])
  // handles stand where the plot last drew its scales
  const [, setDrawn] = useState(0)
  useEffect(() => setView([fromS, toS]), [fromS, toS])
  const show = useCallback(
    (showFromS: number, showToS: number) => {
      setView([showFromS, showToS])
      onView?.(showFromS, showToS)
    },
    [onView],
  )
  const live = useRef<Live>(null as unknown as Live)
  const onZoom = zoomable ? show : () => undefined
  live.current = {
    spec,
    axis,
    timeZone,
    window,
    view,
    onZoom,
    onCursor,
    onDrawn: () => setDrawn((n) => n + 1),
  }
  usePlot(host, heightPx, live, setPlot)
  useEffect(() => {
    if (!plot) return
    plot.setData(plotData(spec, view), false)
    plot.batch(() => plot.setScale('x', { min: view[0], max: view[1] }))
    plot.redraw(true, true)
  }, [plot, view, spec, axis, window?.fromS, window?.toS])
  return { host, plot, view, show }
}

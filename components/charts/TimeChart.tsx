'use client'

import 'uplot/dist/uPlot.min.css'
import { useCallback, useEffect, useRef, useState } from 'react'
import type uPlot from 'uplot'
import { cx } from '@/components/ui/cx'
import { localClock, localDate } from '@/lib/time'
import { ChartTable } from './ChartTable'
import type { Live } from './plot'
import type { ChartSpec, ChartTableData, ChartWindow, ValueAxis } from './types'
import { panned, zoomed } from './view'
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
  const { label, heightPx = 330, zoomable = false, timeZone, table, window, onView } = props
  const host = useRef<HTMLDivElement>(null)
  const [plot, setPlot] = useState<uPlot | null>(null)
  const [view, setView] = useState<readonly [number, number]>([props.fromS, props.toS])
  const [cursorS, setCursorS] = useState<number | null>(null)
  const [drawn, setDrawn] = useState(0)
  const whole = view[0] === props.fromS && view[1] === props.toS

  const show = useCallback(
    (fromS: number, toS: number) => {
      setView([fromS, toS])
      onView?.(fromS, toS)
    },
    [onView],
  )
  useEffect(() => setView([props.fromS, props.toS]), [props.fromS, props.toS])

  const live = useRef<Live>(null as unknown as Live)
  live.current = {
    spec: props.spec,
    axis: props.axis,
    timeZone,
    window,
    view,
    onZoom: zoomable ? show : () => undefined,
    onCursor: setCursorS,
    onDrawn: () => setDrawn((n) => n + 1),
  }
  usePlot(host, heightPx, live, setPlot)

  useEffect(() => {
    if (!plot) return
    plot.setData(plotData(live.current), false)
    plot.batch(() => plot.setScale('x', { min: view[0], max: view[1] }))
    plot.redraw(true, true)
  }, [plot, view, props.spec, props.axis, window?.fromS, window?.toS])

  const onKeyDown = (event: React.KeyboardEvent) => {
    if (!zoomable || event.target !== event.currentTarget) return
    const next = keyView(event.key, view, [props.fromS, props.toS])
    if (!next) return
    event.preventDefault()
    show(next[0], next[1])
  }
  const words = cursorS === null ? null : props.readout?.(cursorS)
  return (
    <figure className="relative">
      {/* biome-ignore lint/a11y/useSemanticElements: a group of drawing and handles, not a fieldset */}
      <div
        role="group"
        aria-label={zoomable ? `${label}. Plus and minus zoom, arrow keys move, 0 shows all of it.` : label}
        tabIndex={zoomable ? 0 : undefined}
        onKeyDown={onKeyDown}
        onDoubleClick={() => show(props.fromS, props.toS)}
        className="relative"
        style={{ minHeight: heightPx }}
      >
        <div
          ref={host}
          aria-hidden="true"
          className={cx('[&_.u-select]:bg-wash-tide', !zoomable && '[&_.u-over]:pointer-events-none')}
        />
        {plot && window && <WindowHandles plot={plot} window={window} timeZone={timeZone} drawn={drawn} />}
      </div>
      <div className="flex min-h-[19px] flex-wrap items-baseline gap-4 text-2 text-ink-3">
        {zoomable && (
          <span className="no-print flex gap-[14px]">
            <ZoomWord words="Closer" onClick={() => show(...zoomed(view, 0.5, [props.fromS, props.toS]))} />
            {!whole && (
              <ZoomWord words="Wider" onClick={() => show(...zoomed(view, 2, [props.fromS, props.toS]))} />
            )}
            {!whole && <ZoomWord words="Show all of it" onClick={() => show(props.fromS, props.toS)} />}
          </span>
        )}
        {words && cursorS !== null && (
          <output className="fig text-1">
            {localDate(cursorS, timeZone)} {localClock(cursorS, timeZone)} · {words}
          </output>
        )}
      </div>
      {table && <ChartTable table={table} />}
    </figure>
  )
}

/** Zooming without a mouse or a keyboard. */
function ZoomWord({ words, onClick }: { words: string; onClick: () => void }) {
  return (
    <button
      type="button"
      className="text-ink-2 underline decoration-edge underline-offset-[3px] max-sm:min-h-[44px]"
      onClick={onClick}
    >
      {words}
    </button>
  )
}

const plotData = ({ spec, view }: Live): uPlot.AlignedData => {
  const first = spec.lines?.[0]
  return first?.timeS.length ? [[...first.timeS], [...first.values]] : [[...view], [null, null]]
}

function keyView(key: string, view: readonly [number, number], whole: readonly [number, number]) {
  if (key === '+' || key === '=') return zoomed(view, 0.5, whole)
  if (key === '-') return zoomed(view, 2, whole)
  if (key === 'ArrowLeft') return panned(view, -0.2, whole)
  if (key === 'ArrowRight') return panned(view, 0.2, whole)
  return key === '0' ? whole : null
}

/** Makes the plot once uPlot has arrived, keeps it as wide as its place, draws it anew when the theme changes. */
function usePlot(
  host: React.RefObject<HTMLDivElement | null>,
  height: number,
  live: React.RefObject<Live>,
  setPlot: (plot: uPlot | null) => void,
) {
  useEffect(() => {
    const root = host.current
    if (!root) return
    let plot: uPlot | null = null
    let stopped = false
    const redraw = () => plot?.redraw(false, true)
    const scheme = matchMedia('(prefers-color-scheme: dark)')
    const theme = new MutationObserver(redraw)
    const resize = new ResizeObserver(() => {
      if (plot && root.clientWidth > 0 && root.clientWidth !== plot.width)
        plot.setSize({ width: root.clientWidth, height })
    })
    Promise.all([import('./plot'), document.fonts.ready]).then(([{ makePlot }]) => {
      if (stopped) return
      plot = makePlot(root, { width: root.clientWidth, height }, () => live.current)
      setPlot(plot)
      resize.observe(root)
      theme.observe(document.documentElement, { attributes: true, attributeFilter: ['data-theme'] })
      scheme.addEventListener('change', redraw)
    })
    return () => {
      stopped = true
      resize.disconnect()
      theme.disconnect()
      scheme.removeEventListener('change', redraw)
      plot?.destroy()
      setPlot(null)
    }
  }, [host, height, live, setPlot])
}

'use client'

import { useRef } from 'react'
import type uPlot from 'uplot'
import { localClock } from '@/lib/time'
import type { ChartWindow } from './types'

type Edge = 'from' | 'to'

/** Fewest stops between the two handles. */
const LEAST_STOPS = 3

const nearestIndex = (stopsS: readonly number[], timeS: number) => {
  let best = 0
  stopsS.forEach((stop, i) => {
    if (Math.abs(stop - timeS) < Math.abs((stopsS[best] ?? 0) - timeS)) best = i
  })
  return best
}

/** Moves one edge to the stop nearest `index`, never past the other. */
function moved(window: ChartWindow, edge: Edge, index: number): readonly [number, number] {
  const { stopsS } = window
  const other = nearestIndex(stopsS, edge === 'from' ? window.toS : window.fromS)
  const last = stopsS.length - 1
  const at =
    edge === 'from'
      ? Math.max(0, Math.min(index, other - LEAST_STOPS))
      : Math.min(last, Math.max(index, other + LEAST_STOPS))
  const stop = stopsS[at] ?? (edge === 'from' ? window.fromS : window.toS)
  return edge === 'from' ? [stop, window.toS] : [window.fromS, stop]
}

const stepOf = (event: React.KeyboardEvent): number | null => {
  const by = event.shiftKey ? 10 : 1
  if (event.key === 'ArrowLeft' || event.key === 'ArrowDown') return -by
  if (event.key === 'ArrowRight' || event.key === 'ArrowUp') return by
  if (event.key === 'Home') return Number.NEGATIVE_INFINITY
  return event.key === 'End' ? Number.POSITIVE_INFINITY : null
}

/** The two edges of a window: drag them, or move them reading by reading with the arrow keys (ten with Shift). */
export function WindowHandles({
  plot,
  window,
  timeZone,
}: {
  plot: uPlot
  window: ChartWindow
  timeZone: string
}) {
  return (['from', 'to'] as const).map((edge) => (
    <Handle key={edge} edge={edge} plot={plot} window={window} timeZone={timeZone} />
  ))
}

function Handle({
  edge,
  plot,
  window,
  timeZone,
}: {
  edge: Edge
  plot: uPlot
  window: ChartWindow
  timeZone: string
}) {
  const dragging = useRef(false)
  const { stopsS } = window
  const atS = edge === 'from' ? window.fromS : window.toS
  const over = plot.over
  const x = over.offsetLeft + plot.valToPos(atS, 'x')
  if (x < over.offsetLeft - 2 || x > over.offsetLeft + over.clientWidth + 2) return null
  const set = (index: number) => window.onChange(...moved(window, edge, index))
  return (
    <div
      role="slider"
      tabIndex={0}
      aria-label={edge === 'from' ? 'Start of the window' : 'End of the window'}
      aria-valuemin={stopsS[0] ?? atS}
      aria-valuemax={stopsS[stopsS.length - 1] ?? atS}
      aria-valuenow={atS}
      aria-valuetext={localClock(atS, timeZone)}
      onKeyDown={(event) => {
        const step = stepOf(event)
        if (step === null) return
        event.preventDefault()
        set(Math.max(0, Math.min(stopsS.length - 1, nearestIndex(stopsS, atS) + step)))
      }}
      onPointerDown={(event) => {
        event.preventDefault()
        event.currentTarget.setPointerCapture(event.pointerId)
        event.currentTarget.focus()
        dragging.current = true
      }}
      onPointerMove={(event) => {
        if (!dragging.current) return
        const timeS = plot.posToVal(event.clientX - over.getBoundingClientRect().left, 'x')
        set(nearestIndex(stopsS, timeS))
      }}
      onPointerUp={() => {
        dragging.current = false
      }}
      onPointerCancel={() => {
        dragging.current = false
      }}
      className="absolute z-10 w-6 cursor-ew-resize touch-none"
      style={{ left: x - 12, top: over.offsetTop, height: over.clientHeight }}
    >
      <span className="absolute inset-y-0 left-1/2 w-[1.5px] -translate-x-1/2 bg-tide" />
      <span className="absolute top-1/2 left-1/2 flex h-[30px] w-[10px] -translate-x-1/2 -translate-y-1/2 items-center justify-center gap-[2px] rounded-1 border-[1.5px] border-tide bg-paper">
        <span className="h-3 w-px bg-tide" />
        <span className="h-3 w-px bg-tide" />
      </span>
    </div>
  )
}

'use client'

import { useEffect, useId, useRef, useState } from 'react'
import { spaced } from '@/lib/format/counts'
import type { SupplySpan } from '@/lib/format/supply-spans'
import { timeTicks } from '@/lib/format/time-ticks'
import type { ChartPoint, RoomDecay, RoomSeries } from '@/lib/wire/rooms'

const HEIGHT = 112
const TOP = 8
const BASE = 76
const RIGHT = 88
const FIRST_WIDTH = 720
const NARROW = 500
const HALF = (value: number) => Math.round(value) + 0.5

export type TideLineProps = {
  series: RoomSeries
  decays: readonly RoomDecay[]
  supply: readonly SupplySpan[]
  outdoorPpm: number
  limitPpm: number
  timeZone: string
  /** what it shows, in words */
  words: string
}

type Scale = {
  x: (timeS: number) => number
  y: (ppm: number) => number
  width: number
  plotRight: number
  narrow: boolean
}

/** Stretches of points without a gap. */
function runs(points: readonly ChartPoint[], gapS: number): ChartPoint[][] {
  const all: ChartPoint[][] = []
  for (const point of points) {
    const last = all[all.length - 1]
    const before = last?.[last.length - 1]
    if (last && before && point[0] - before[0] <= gapS) last.push(point)
    else all.push([point])
  }
  return all
}

const course = (points: readonly ChartPoint[], { x, y }: Scale) =>
  points.map(([t, c], i) => `${i ? 'L' : 'M'}${x(t).toFixed(1)} ${y(c).toFixed(1)}`).join('')

const ground = (points: readonly ChartPoint[], scale: Scale) => {
  const first = points[0]
  const last = points[points.length - 1]
  return first && last
    ? `${course(points, scale)}L${scale.x(last[0]).toFixed(1)} ${BASE}L${scale.x(first[0]).toFixed(1)} ${BASE}Z`
    : ''
}

/** The strip of a room's last 24 hours: level as area, limit as a line out past both ends, decays hatched, supply hours under the axis. */
export function TideLine(props: TideLineProps) {
  const host = useRef<HTMLDivElement>(null)
  const [width, setWidth] = useState(FIRST_WIDTH)
  useEffect(() => {
    const root = host.current
    if (!root) return
    const observer = new ResizeObserver(() => setWidth(Math.max(240, root.clientWidth)))
    observer.observe(root)
    return () => observer.disconnect()
  }, [])
  const { series, outdoorPpm, limitPpm, words } = props
  const narrow = width < NARROW
  const plotRight = narrow ? width : width - RIGHT
  const top = outdoorPpm + 1.5 * (limitPpm - outdoorPpm)
  const scale: Scale = {
    width,
    plotRight,
    narrow,
    x: (t) => ((t - series.fromS) / (series.toS - series.fromS)) * plotRight,
    y: (c) =>
      BASE - ((Math.max(outdoorPpm, Math.min(top, c)) - outdoorPpm) / (top - outdoorPpm)) * (BASE - TOP),
  }
  return (
    <div ref={host} className="overflow-hidden [overflow-clip-margin:6px]">
      <svg
        width={width}
        height={HEIGHT}
        viewBox={`0 0 ${width} ${HEIGHT}`}
        role="img"
        aria-label={words}
        className="block max-w-none"
      >
        <Level {...props} scale={scale} />
        <Frame {...props} scale={scale} />
      </svg>
    </div>
  )
}

function Level({ series, decays, limitPpm, scale }: TideLineProps & { scale: Scale }) {
  const id = useId()
  const limitY = scale.y(limitPpm)
  const stretches = runs(series.points, series.gapS)
  const fallen = decays
    .filter(({ quality }) => quality !== 'refused')
    .map(({ id: key, startS, endS }) => ({
      key,
      points: series.points.filter(([t]) => t >= startS && t <= endS),
    }))
    .filter(({ points }) => points.length > 1)
  const whole = stretches.map((points) => ground(points, scale)).join('')
  return (
    <>
      <clipPath id={`${id}-above`}>
        <rect x="0" y="0" width={scale.width} height={limitY} />
      </clipPath>
      <clipPath id={`${id}-below`}>
        <rect x="0" y={limitY} width={scale.width} height={BASE - limitY} />
      </clipPath>
      <path d={whole} fill="var(--tide)" clipPath={`url(#${id}-below)`} />
      {fallen.map(({ key, points }) => (
        <g key={key} clipPath={`url(#${id}-below)`}>
          <path d={ground(points, scale)} fill="var(--paper)" />
          <path d={ground(points, scale)} fill="url(#p-decay)" />
          <path d={course(points, scale)} fill="none" stroke="var(--tide)" strokeWidth="1.5" />
        </g>
      ))}
      <path d={whole} fill="url(#p-over)" clipPath={`url(#${id}-above)`} />
    </>
  )
}

function Frame({ series, supply, outdoorPpm, limitPpm, timeZone, scale }: TideLineProps & { scale: Scale }) {
  const { x, y, plotRight, narrow } = scale
  const ticks = timeTicks(series.fromS, series.toS, timeZone, narrow ? 4 : 8)
  return (
    <>
      <path d={`M0 ${HALF(BASE)}H${plotRight}`} stroke="var(--ink)" />
      <path d={`M-5 ${HALF(y(limitPpm))}H${plotRight + 5}`} stroke="var(--ink)" strokeWidth="1.25" />
      {!narrow && (
        <g className="fill-ink-2 text-1">
          <text x={plotRight + 12} y={y(limitPpm) + 4}>
            {spaced(limitPpm)} limit
          </text>
          <text x={plotRight + 12} y={BASE + 4}>
            {spaced(outdoorPpm)} outdoors
          </text>
        </g>
      )}
      {supply.map((span) => {
        const from = Math.max(0, x(span.fromS))
        return (
          <rect
            key={span.fromS}
            x={from}
            y={BASE + 4}
            width={Math.max(0, x(span.toS) - from)}
            height="3"
            fill="var(--tide)"
          />
        )
      })}
      {ticks.map((tick) => {
        const at = x(tick.atS)
        if (at < 16 || at > plotRight - 16) return null
        return (
          <g key={tick.atS}>
            <path d={`M${HALF(at)} ${BASE}v9`} stroke="var(--edge)" />
            <text
              x={at}
              y={BASE + 23}
              textAnchor="middle"
              className="fig fill-ink-3 text-[11.5px]"
              fontWeight={tick.strong ? 650 : 400}
            >
              {tick.label}
            </text>
          </g>
        )
      })}
    </>
  )
}

import uPlot from 'uplot'
import { logTicks, timeTicks, valueTicks } from '@/lib/format/time-ticks'
import { drawAbove, drawBelow } from './draw'
import { LANE_PX } from './draw/marks'
import { readPalette } from './draw/palette'
import { plotData } from './plot-data'
import type { ChartSpec, ChartWindow, ValueAxis } from './types'

/** What the plot reads anew at every draw, so that data, theme and window may change without making it again. */
export type Live = {
  spec: ChartSpec
  axis: ValueAxis
  timeZone: string
  window: ChartWindow | undefined
  view: readonly [number, number]
  onZoom: (fromS: number, toS: number) => void
  onCursor: (timeS: number | null) => void
  onDrawn: (u: uPlot) => void
}

/** Width of the words at the right end; below 500 px they are left out. */
const RIGHT_PX = 88
const NARROW_PX = 500
const VALUE_WIDTH_PX = 44
const LABEL_HALF_PX = 20

/** Makes the one kind of uPlot that Ebbmark draws: it gives axes, scales and the drag to zoom; the layers are drawn by ./draw. */
export function makePlot(
  root: HTMLElement,
  size: { width: number; height: number },
  live: () => Live,
): uPlot {
  const narrow = size.width < NARROW_PX
  const { spec, axis } = live()
  const top = (spec.lanes?.length ?? 0) * LANE_PX + 12
  const isLog = axis.scale === 'log'
  const options: uPlot.Options = {
    ...size,
    padding: [top, narrow ? 4 : RIGHT_PX, 0, 0],
    legend: { show: false },
    cursor: {
      x: true,
      y: false,
      points: { show: false },
      drag: { x: true, y: false, setScale: false, dist: 6 },
    },
    select: { show: true, left: 0, top: 0, width: 0, height: 0 },
    scales: {
      x: { time: false, range: () => [...live().view] as [number, number] },
      y: isLog
        ? { distr: 3, log: 10, range: () => [live().axis.low, live().axis.high] }
        : { range: () => [live().axis.low, live().axis.high] },
    },
    axes: [timeAxis(live, narrow), valueAxis(live)],
    series: [{}, { show: true, paths: () => null, points: { show: false } }],
    hooks: {
      drawAxes: [(u) => drawBelow(u, live().spec, live().window)],
      draw: [
        (u) => {
          drawAbove(u, live().spec)
          live().onDrawn(u)
        },
      ],
      setSelect: [(u) => zoomToSelection(u, live)],
      setCursor: [
        (u) =>
          live().onCursor(
            u.cursor.left === undefined || u.cursor.left < 0 ? null : u.posToVal(u.cursor.left, 'x'),
          ),
      ],
    },
  }
  return new uPlot(options, plotData(spec, live().view), root)
}

function zoomToSelection(u: uPlot, live: () => Live): void {
  const { left, width } = u.select
  if (width < 4) return
  live().onZoom(u.posToVal(left, 'x'), u.posToVal(left + width, 'x'))
  u.setSelect({ left: 0, top: 0, width: 0, height: 0 }, false)
}

function timeAxis(live: () => Live, narrow: boolean): uPlot.Axis {
  const ticks = (u: uPlot) => {
    const most = Math.max(2, Math.floor(u.bbox.width / uPlot.pxRatio / (narrow ? 64 : 72)))
    const [fromS, toS] = live().view
    // half a label's width is kept free at both ends, so that none is cut
    const edgeS = ((toS - fromS) * LABEL_HALF_PX * uPlot.pxRatio) / u.bbox.width
    const ticks = timeTicks(fromS, toS, live().timeZone, most)
    return narrow ? ticks.filter(({ atS }) => atS < toS - edgeS) : ticks
  }
  return {
    scale: 'x',
    side: 2,
    size: 36,
    gap: 8,
    grid: { show: false },
    border: { show: false },
    ticks: { show: true, stroke: () => readPalette().edge, size: 9, width: 1 },
    stroke: () => readPalette().ink3,
    font: `11.5px ${readPalette().figures}`,
    splits: (u) => ticks(u).map((tick) => tick.atS),
    values: (u) => ticks(u).map((tick) => tick.label),
  }
}

function valueAxis(live: () => Live): uPlot.Axis {
  return {
    scale: 'y',
    side: 3,
    size: VALUE_WIDTH_PX,
    gap: 8,
    border: { show: false },
    ticks: { show: false },
    grid: { show: true, stroke: () => readPalette().rule, width: 1 },
    stroke: () => readPalette().ink3,
    font: `11.5px ${readPalette().figures}`,
    splits: () => {
      const { low, high, scale, most = 7 } = live().axis
      return scale === 'log' ? logTicks(low, high) : valueTicks(low, high, most)
    },
    values: (_, splits) => splits.map((value) => String(value).replace('-', '−')),
  }
}

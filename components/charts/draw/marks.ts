import type { Interval, Lane, LaneItem, Level, Upright } from '../types'
import { type Frame, inPlot, pen, sharp, word } from './frame'

/** Height of one lane above the plot, CSS pixels. */
export const LANE_PX = 21

const levelPen = {
  limit: { width: 1.25, dash: [6, 4], colour: 'silt' },
  basis: { width: 1.5, dash: [], colour: 'ink' },
  background: { width: 1.25, dash: [], colour: 'reed' },
  floor: { width: 1, dash: [1, 3], colour: 'edge' },
  zero: { width: 1, dash: [], colour: 'ink' },
} as const

/** A horizontal value; its word stands inside where asked, else at the right end (see labels). */
export function drawLevel(frame: Frame, level: Level): void {
  const { context, palette, ratio } = frame
  const { width, dash, colour } = levelPen[level.look]
  const y = sharp(frame.y(level.value))
  inPlot(frame, () => {
    pen(frame, palette[colour], width, dash)
    context.beginPath()
    context.moveTo(frame.left, y)
    context.lineTo(frame.right, y)
    context.stroke()
    if (level.label && level.labelInside) {
      const tone =
        level.look === 'background'
          ? palette.reedInk
          : level.look === 'limit'
            ? palette.siltInk
            : palette.ink3
      word(frame, level.label, frame.left + 6 * ratio, y - 9 * ratio, tone)
    }
  })
}

/** A value with its 95 % interval as an upright bar. */
export function drawInterval(frame: Frame, interval: Interval): void {
  const { context, palette, ratio } = frame
  const x = frame.x(interval.atS)
  if (x < frame.left - 1 || x > frame.right + 1) return
  context.save()
  if (interval.look === 'few') {
    if (interval.value !== null) {
      pen(frame, palette.fog, 1.5, [2.4, 2.4])
      context.beginPath()
      context.moveTo(x - 6 * ratio, frame.y(interval.value))
      context.lineTo(x + 6 * ratio, frame.y(interval.value))
      context.stroke()
    }
    context.restore()
    return
  }
  drawBar(frame, interval, x)
  if (interval.value !== null) drawDot(frame, interval.look, x, frame.y(interval.value))
  context.restore()
}

function drawBar(frame: Frame, { low, high }: Interval, x: number): void {
  if (low === null && high === null) return
  const { context, palette, ratio } = frame
  const yLow = low === null ? frame.bottom : Math.min(frame.bottom, frame.y(low))
  const yHigh = high === null ? frame.top : Math.max(frame.top, frame.y(high))
  context.globalAlpha = 0.3
  context.fillStyle = palette.tide
  context.fillRect(x - 3 * ratio, yHigh, 6 * ratio, Math.max(2 * ratio, yLow - yHigh))
  context.globalAlpha = 1
  pen(frame, palette.tide, 1.25)
  context.beginPath()
  for (const y of [low === null ? null : yLow, high === null ? null : yHigh]) {
    if (y === null) continue
    context.moveTo(x - 5 * ratio, y)
    context.lineTo(x + 5 * ratio, y)
  }
  context.stroke()
}

function drawDot(frame: Frame, look: 'dot' | 'ring', x: number, y: number): void {
  const { context, palette, ratio } = frame
  context.beginPath()
  context.arc(x, y, (look === 'dot' ? 3.6 : 3) * ratio, 0, 2 * Math.PI)
  context.fillStyle = look === 'dot' ? palette.tide : palette.paper
  context.fill()
  if (look === 'dot') return
  pen(frame, palette.tide, 1.4)
  context.stroke()
}

/** An upright with its words beside its head, on the side where there is room. */
export function drawUpright(frame: Frame, upright: Upright): void {
  const { context, palette, ratio } = frame
  const x = sharp(frame.x(upright.atS))
  if (x < frame.left || x > frame.right) return
  const colour = upright.look === 'change' ? palette.silt : palette.edge
  context.save()
  pen(frame, colour, upright.look === 'change' ? 1.5 : 1)
  context.beginPath()
  context.moveTo(x, frame.top)
  context.lineTo(x, frame.bottom)
  context.stroke()
  const tone = upright.look === 'change' ? palette.siltInk : palette.ink2
  const align = x > (frame.left + frame.right) / 2 ? 'right' : 'left'
  word(frame, upright.words, x + (align === 'left' ? 8 : -8) * ratio, frame.top + 8 * ratio, tone, { align })
  context.restore()
}

/** Lanes stand above the plot, the last one nearest; decays are hatched with an edge, alarms are solid. */
export function drawLanes(frame: Frame, lanes: readonly Lane[]): void {
  const { context, palette, ratio } = frame
  lanes.forEach((lane, i) => {
    const y = frame.top - (lanes.length - i - 0.5) * LANE_PX * ratio - 4 * ratio
    context.save()
    pen(frame, palette.rule, 1)
    context.beginPath()
    context.moveTo(frame.left, sharp(y))
    context.lineTo(frame.right, sharp(y))
    context.stroke()
    for (const item of lane.items) drawLaneItem(frame, item, y)
    context.restore()
    word(frame, lane.label, frame.right + 10 * ratio, y, palette.ink3)
  })
}

function drawLaneItem(frame: Frame, item: LaneItem, y: number): void {
  const { context, palette, ratio } = frame
  const from = Math.max(frame.left, frame.x(item.fromS))
  const to = Math.min(frame.right, frame.x(item.toS))
  if (to < frame.left || from > frame.right) return
  const width = Math.max(5 * ratio, to - from)
  const height = 10 * ratio
  context.fillStyle = palette.paper
  context.fillRect(from, y - height / 2, width, height)
  context.fillStyle = item.look === 'alarm' ? palette.silt : frame.hatch(item.look)
  context.fillRect(from, y - height / 2, width, height)
  if (item.look === 'alarm') return
  pen(frame, item.look === 'kept' ? palette.tide : palette.fog, 1)
  context.strokeRect(sharp(from), sharp(y - height / 2), width, height)
}

/** Supply hours: a bar of 3 px under the axis. */
export function drawSupply(frame: Frame, spans: readonly { fromS: number; toS: number }[]): void {
  const { context, palette, ratio } = frame
  context.fillStyle = palette.tide
  for (const span of spans) {
    const from = Math.max(frame.left, frame.x(span.fromS))
    const to = Math.min(frame.right, frame.x(span.toS))
    if (to > from) context.fillRect(from, frame.bottom + 4 * ratio, to - from, 3 * ratio)
  }
}

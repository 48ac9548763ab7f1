import uPlot from 'uplot'
import type { ChartSpec, ChartWindow } from '../types'
import { drawArea, drawBand, drawLine, drawPoints, drawStems } from './courses'
import { type Frame, frameOf, pen, sharp } from './frame'
import { drawEndLabels } from './labels'
import { drawInterval, drawLanes, drawLevel, drawSupply, drawUpright } from './marks'

/** What lies under the curves: window, hatches, outdoor level, limit and basis. */
export function drawBelow(u: uPlot, spec: ChartSpec, window: ChartWindow | undefined): void {
  const frame = frameOf(u, uPlot.pxRatio)
  const measured = spec.lines?.find((line) => line.look === 'measured')
  if (window) drawWash(frame, window)
  for (const area of spec.areas ?? []) drawArea(frame, area, measured)
  if (spec.band) drawBand(frame, spec.band)
  for (const line of spec.lines ?? []) if (line.look === 'outdoor') drawLine(frame, line)
  for (const level of spec.levels ?? []) drawLevel(frame, level)
}

/** What is read: measured, fit, points, intervals, uprights; then lanes, supply hours and the words at the right end. */
export function drawAbove(u: uPlot, spec: ChartSpec): void {
  const frame = frameOf(u, uPlot.pxRatio)
  for (const line of spec.lines ?? [])
    if (line.look !== 'outdoor' && line.look !== 'fit') drawLine(frame, line)
  for (const points of spec.points ?? []) drawPoints(frame, points)
  for (const line of spec.lines ?? []) if (line.look === 'fit') drawLine(frame, line)
  if (spec.stems) drawStems(frame, spec.stems)
  for (const upright of spec.uprights ?? []) drawUpright(frame, upright)
  for (const interval of spec.intervals ?? []) drawInterval(frame, interval)
  drawAxisLine(frame)
  drawSupply(frame, spec.supply ?? [])
  drawLanes(frame, spec.lanes ?? [])
  drawEndLabels(frame, spec)
}

function drawWash(frame: Frame, window: ChartWindow): void {
  const from = Math.max(frame.left, frame.x(window.fromS))
  const to = Math.min(frame.right, frame.x(window.toS))
  frame.context.fillStyle = frame.palette.washTide
  if (to > from) frame.context.fillRect(from, frame.top, to - from, frame.bottom - frame.top)
}

/** The bottom axis in ink; values have no side line, their labels stand on hairlines. */
function drawAxisLine(frame: Frame): void {
  const { context, left, right, bottom, palette } = frame
  pen(frame, palette.ink, 1)
  context.beginPath()
  context.moveTo(left, sharp(bottom))
  context.lineTo(right, sharp(bottom))
  context.stroke()
}

import type uPlot from 'uplot'
import { hatch, type Palette, readPalette } from './palette'

/** Where and with what a layer draws: canvas, colours, and values turned into canvas pixels. */
export type Frame = {
  context: CanvasRenderingContext2D
  palette: Palette
  /** canvas pixels per CSS pixel */
  ratio: number
  left: number
  right: number
  top: number
  bottom: number
  x: (timeS: number) => number
  y: (value: number) => number
  hatch: (look: 'kept' | 'left out') => CanvasPattern | string
}

/** The drawing frame of a plot as it stands. */
export function frameOf(u: uPlot, ratio: number): Frame {
  const palette = readPalette()
  const { left, top, width, height } = u.bbox
  const scale = u.scales.y
  const isLog = scale?.distr === 3
  const floor = isLog ? (scale?.min ?? 1) : Number.NEGATIVE_INFINITY
  return {
    context: u.ctx,
    palette,
    ratio,
    left,
    top,
    right: left + width,
    bottom: top + height,
    x: (timeS) => u.valToPos(timeS, 'x', true),
    y: (value) => u.valToPos(Math.max(floor, value), 'y', true),
    hatch: (look) => hatch(look, palette, ratio),
  }
}

/** Draws with the plot's rectangle as clip. */
export function inPlot(frame: Frame, draw: () => void): void {
  const { context, left, top, right, bottom, ratio } = frame
  context.save()
  context.beginPath()
  context.rect(left, top - 2 * ratio, right - left, bottom - top + 4 * ratio)
  context.clip()
  draw()
  context.restore()
}

/** On the half pixel, so that a hairline is sharp. */
export const sharp = (position: number) => Math.round(position) + 0.5

/** Sets the pen. Width in CSS pixels. */
export function pen(frame: Frame, colour: string, width: number, dash: readonly number[] = []): void {
  frame.context.strokeStyle = colour
  frame.context.lineWidth = width * frame.ratio
  frame.context.setLineDash(dash.map((part) => part * frame.ratio))
}

/** A word on the canvas, 12 px. */
export function word(
  frame: Frame,
  text: string,
  x: number,
  y: number,
  colour: string,
  options: { align?: CanvasTextAlign; weight?: number; figures?: boolean } = {},
): void {
  const { context, ratio, palette } = frame
  const size = (options.figures ? 11.5 : 12) * ratio
  context.font = `${options.weight ?? 400} ${size}px ${options.figures ? palette.figures : palette.text}`
  context.fillStyle = colour
  context.textAlign = options.align ?? 'left'
  context.textBaseline = 'middle'
  context.fillText(text, x, y)
}

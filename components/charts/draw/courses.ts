import type { Area, Band, Line, LineLook, Points, Stems } from '../types'
import { type Frame, inPlot, pen } from './frame'

const dashes: Partial<Record<LineLook, number[]>> = { 'fit beyond': [1.5, 4], earlier: [2, 4] }
const widths: Record<LineLook, number> = {
  measured: 1.4,
  fit: 2,
  'fit beyond': 1.25,
  outdoor: 1.25,
  earlier: 1.25,
}

const colourOf = (frame: Frame, look: LineLook) => {
  const { palette } = frame
  if (look === 'measured') return palette.ink
  if (look === 'outdoor') return palette.reed
  return look === 'earlier' ? palette.edge : palette.tide
}

/** A course; null lifts the pen. */
export function drawLine(frame: Frame, line: Line): void {
  const { context } = frame
  inPlot(frame, () => {
    pen(frame, colourOf(frame, line.look), widths[line.look], dashes[line.look])
    context.lineJoin = 'round'
    context.beginPath()
    let down = false
    line.timeS.forEach((timeS, i) => {
      const value = line.values[i]
      if (value === null || value === undefined || Number.isNaN(value)) {
        down = false
        return
      }
      if (down) context.lineTo(frame.x(timeS), frame.y(value))
      else context.moveTo(frame.x(timeS), frame.y(value))
      down = true
    })
    context.stroke()
  })
}

/** Single readings: filled where used in a fit, open where not. */
export function drawPoints(frame: Frame, points: Points): void {
  const { context, palette, ratio } = frame
  const radius = (points.look === 'used' ? 2.1 : 1.8) * ratio
  inPlot(frame, () => {
    context.fillStyle = palette.ink
    pen(frame, palette.edge, 1)
    points.timeS.forEach((timeS, i) => {
      context.beginPath()
      context.arc(frame.x(timeS), frame.y(points.values[i] ?? 0), radius, 0, 2 * Math.PI)
      if (points.look === 'used') context.fill()
      else context.stroke()
    })
  })
}

/** From each value to zero, with a dot. */
export function drawStems(frame: Frame, stems: Stems): void {
  const { context, palette, ratio } = frame
  inPlot(frame, () => {
    pen(frame, palette.edge, 1)
    context.fillStyle = palette.ink
    stems.timeS.forEach((timeS, i) => {
      const x = frame.x(timeS)
      const y = frame.y(stems.values[i] ?? 0)
      context.beginPath()
      context.moveTo(x, frame.y(0))
      context.lineTo(x, y)
      context.stroke()
      context.beginPath()
      context.arc(x, y, 2 * ratio, 0, 2 * Math.PI)
      context.fill()
    })
  })
}

/** Hatches the ground under the measured course between two instants; too narrow for a hatch, it is a wash. */
export function drawArea(frame: Frame, area: Area, course: Line | undefined): void {
  if (!course) return
  const { context, palette, ratio } = frame
  const inside = course.timeS
    .map((timeS, i) => ({ timeS, value: course.values[i] }))
    .filter((point): point is { timeS: number; value: number } => {
      return point.timeS >= area.fromS && point.timeS <= area.toS && typeof point.value === 'number'
    })
  const first = inside[0]
  const last = inside[inside.length - 1]
  if (!first || !last || inside.length < 2) return
  const narrow = frame.x(last.timeS) - frame.x(first.timeS) < 9 * ratio
  inPlot(frame, () => {
    context.beginPath()
    context.moveTo(frame.x(first.timeS), frame.bottom)
    for (const point of inside) context.lineTo(frame.x(point.timeS), frame.y(point.value))
    context.lineTo(frame.x(last.timeS), frame.bottom)
    context.closePath()
    context.globalAlpha = narrow ? 0.45 : 1
    context.fillStyle = narrow ? (area.look === 'kept' ? palette.tide : palette.fog) : frame.hatch(area.look)
    context.fill()
  })
}

/** The band of a fit. */
export function drawBand(frame: Frame, band: Band): void {
  const { context, palette } = frame
  inPlot(frame, () => {
    context.beginPath()
    band.timeS.forEach((timeS, i) => {
      context.lineTo(frame.x(timeS), frame.y(band.high[i] ?? 0))
    })
    for (let i = band.timeS.length - 1; i >= 0; i -= 1)
      context.lineTo(frame.x(band.timeS[i]!), frame.y(band.low[i] ?? 0))
    context.closePath()
    context.globalAlpha = 0.18
    context.fillStyle = palette.tide
    context.fill()
  })
}

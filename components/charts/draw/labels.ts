import type { ChartSpec } from '../types'
import { type Frame, word } from './frame'

type EndLabel = { text: string; y: number; colour: string; weight?: number }

const LEAST_GAP_PX = 14

/** Words at the right end of curves and levels, moved apart where they would touch. */
export function drawEndLabels(frame: Frame, spec: ChartSpec): void {
  const { palette, ratio } = frame
  const labels: EndLabel[] = []
  for (const level of spec.levels ?? []) {
    if (!level.label || level.labelInside) continue
    const strong = level.look === 'basis'
    const colour =
      level.look === 'limit' ? palette.siltInk : level.look === 'background' ? palette.reedInk : palette.ink
    labels.push({ text: level.label, y: frame.y(level.value), colour, weight: strong ? 620 : 400 })
  }
  for (const line of spec.lines ?? []) {
    const last = line.values.findLast((value) => typeof value === 'number')
    if (!line.label || typeof last !== 'number') continue
    const colour =
      line.look === 'outdoor' ? palette.reedInk : line.look === 'measured' ? palette.ink : palette.tideInk
    labels.push({ text: line.label, y: frame.y(last), colour })
  }
  for (const label of spec.endLabels ?? []) {
    labels.push({
      text: label.words,
      y: frame.y(label.value),
      colour: label.tone === 'tide' ? palette.tideInk : palette.ink,
    })
  }
  if (spec.supply?.length)
    labels.push({ text: 'supply on', y: frame.bottom + 8 * ratio, colour: palette.ink3 })
  labels.sort((a, b) => a.y - b.y)
  spread(labels, LEAST_GAP_PX * ratio)
  for (const { text, y, colour, weight } of labels)
    word(frame, text, frame.right + 10 * ratio, y, colour, { weight })
}

/** Pushes upward from below, so that the words under the axis keep their place. */
function spread(labels: EndLabel[], gap: number): void {
  for (let i = labels.length - 2; i >= 0; i -= 1) {
    labels[i]!.y = Math.min(labels[i]!.y, labels[i + 1]!.y - gap)
  }
}

import type uPlot from 'uplot'
import type { ChartSpec } from './types'
import type { View } from './view'

/** uPlot needs a table of its own; it carries the first course, or the ends of the view where there is none. */
export function plotData(spec: ChartSpec, view: View): uPlot.AlignedData {
  const first = spec.lines?.[0]
  if (!first || first.timeS.length === 0) return [[...view], [null, null]]
  return [[...first.timeS], [...first.values]]
}

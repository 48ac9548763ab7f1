/**
 * What a chart shows, as plain data. One grammar for every chart: measured, fit, band, window, outdoor, limit, basis, earlier fit,
 * decays hatched, changes upright, lanes above the plot, labels at the right end instead of a legend.
 */
export type LineLook = 'measured' | 'fit' | 'fit beyond' | 'outdoor' | 'earlier'

/** A course in time; null breaks the line. */
export type Line = {
  look: LineLook
  timeS: readonly number[]
  values: readonly (number | null)[]
  /** word at the right end */
  label?: string
}

/** Single readings: filled where used, open where not. */
export type Points = { look: 'used' | 'not used'; timeS: readonly number[]; values: readonly number[] }

/** A horizontal value with its word. */
export type Level = {
  look: 'limit' | 'basis' | 'background' | 'floor' | 'zero'
  value: number
  label?: string
  labelInside?: boolean
}

/** Hatched under a course from its start to its end. */
export type Area = { look: 'kept' | 'left out'; fromS: number; toS: number }

/** Between two courses: the band of a fit. */
export type Band = { timeS: readonly number[]; low: readonly number[]; high: readonly number[] }

/** A value with its 95 % interval at one time; `few` has too few decays for a figure. */
export type Interval = {
  look: 'dot' | 'ring' | 'few'
  atS: number
  value: number | null
  low: number | null
  high: number | null
}

/** An upright with its words: a change for the worse in silt, a plain note in ink. */
export type Upright = { look: 'change' | 'note'; atS: number; words: string }

/** Spans above the plot, each with what it is in words. */
export type LaneItem = { look: 'kept' | 'left out' | 'alarm'; fromS: number; toS: number; words: string }
export type Lane = { label: string; items: readonly LaneItem[] }

/** From each value to zero: what is left over after a fit. */
export type Stems = { timeS: readonly number[]; values: readonly number[] }

export type ChartSpec = {
  lines?: readonly Line[]
  points?: readonly Points[]
  levels?: readonly Level[]
  areas?: readonly Area[]
  band?: Band
  intervals?: readonly Interval[]
  uprights?: readonly Upright[]
  lanes?: readonly Lane[]
  stems?: Stems
  /** supply hours: a bar of 3 px under the axis */
  supply?: readonly { fromS: number; toS: number }[]
  /** words for the labels of curves at the right end of intervals: value and word */
  endLabels?: readonly { value: number; words: string; tone: 'tide' | 'ink' }[]
}

export type ValueAxis = {
  low: number
  high: number
  /** `log` shows the same unit on 1, 2, 5 ticks */
  scale?: 'linear' | 'log'
  /** most ticks; 7 by default */
  most?: number
}

/** A window on the time axis with two handles that can be dragged, or moved reading by reading with the arrow keys. */
export type ChartWindow = {
  fromS: number
  toS: number
  /** the instants a handle may stand on, rising */
  stopsS: readonly number[]
  onChange: (fromS: number, toS: number) => void
}

/** The chart as a table: what it shows, for those who read rather than look. */
export type ChartTableData = {
  caption: string
  columns: readonly string[]
  rows: readonly (readonly string[])[]
}

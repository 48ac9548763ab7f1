/** Colours of the theme as they stand now, for canvas. */
export type Palette = Record<
  | 'paper'
  | 'ink'
  | 'ink2'
  | 'ink3'
  | 'rule'
  | 'edge'
  | 'tide'
  | 'tideInk'
  | 'reed'
  | 'reedInk'
  | 'silt'
  | 'siltInk'
  | 'fog'
  | 'washTide',
  string
> & { text: string; figures: string }

const names: Record<keyof Palette, string> = {
  paper: '--paper',
  ink: '--ink',
  ink2: '--ink-2',
  ink3: '--ink-3',
  rule: '--rule',
  edge: '--edge',
  tide: '--tide',
  tideInk: '--tide-ink',
  reed: '--reed',
  reedInk: '--reed-ink',
  silt: '--silt',
  siltInk: '--silt-ink',
  fog: '--fog',
  washTide: '--wash-tide',
  text: '--text',
  figures: '--figures',
}

/** Reads the tokens from the document, so a chart follows the theme. */
export function readPalette(): Palette {
  const style = getComputedStyle(document.documentElement)
  const entries = Object.entries(names).map(([key, name]) => [key, style.getPropertyValue(name).trim()])
  return Object.fromEntries(entries) as Palette
}

/** A 45 degree hatch on transparent ground: decays that are kept, or left out. */
export function hatch(look: 'kept' | 'left out', palette: Palette, ratio: number): CanvasPattern | string {
  const step = (look === 'kept' ? 5 : 6) * Math.SQRT2 * ratio
  const size = Math.round(step)
  const tile = document.createElement('canvas')
  tile.width = size
  tile.height = size
  const context = tile.getContext('2d')
  const colour = look === 'kept' ? palette.tide : palette.fog
  if (!context) return colour
  context.strokeStyle = colour
  context.lineWidth = (look === 'kept' ? 1.5 : 0.9) * ratio
  context.beginPath()
  for (const shift of [-size, 0, size]) {
    context.moveTo(shift - 1, size + 1)
    context.lineTo(shift + size + 1, -1)
  }
  context.stroke()
  return context.createPattern(tile, 'repeat') ?? colour
}

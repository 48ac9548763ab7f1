import { NEAR_LEVEL } from '@/lib/air/room-state'
import { encodePng, type Rgba } from '../png'

/** Drawn at twice the size it is shown at, for sharp screens. */
export const GLASS_SCALE = 2
export const GLASS_SIZE = { width: 46, height: 96 }

/** The level at the rim; the limit (1) so stands at two thirds of the height. */
const RIM = 1.5
const WALL = 1.25
const INSET = 2.4
const LIMIT_OVERHANG = 6
const CORNER = 5
/** Grid of samples a pixel, for smooth edges. */
const SAMPLES = 4

type Colour = readonly [number, number, number]
const INK: Colour = [0x10, 0x26, 0x2c]
const TIDE: Colour = [0x0e, 0x6b, 0x74]
const DEEP: Colour = [0x0a, 0x3f, 0x4a]
const SILT: Colour = [0x9b, 0x3b, 0x26]
const LEAF: Colour = [0xfc, 0xfa, 0xf6]

const LEFT = LIMIT_OVERHANG
const RIGHT = GLASS_SIZE.width - LIMIT_OVERHANG
const HEIGHT = GLASS_SIZE.height
const LIMIT_Y = HEIGHT - (HEIGHT * 1) / RIM

/** Hatch of a fill: none in range, wide and deep near the limit, dense the other way above the line. */
function fillColour(x: number, y: number, level: number): Colour {
  if (level > 1 && y < LIMIT_Y) return (x - y + 1000) % 5 < 1.4 ? LEAF : SILT
  if (level >= NEAR_LEVEL && level <= 1) return (x + y) % 9 < 1.6 ? LEAF : DEEP
  return TIDE
}

/** Signed distance to a rectangle with round lower corners; negative inside. */
function vesselDistance(x: number, y: number, inset: number): number {
  const radius = Math.max(0, CORNER - inset)
  const left = LEFT + inset
  const right = RIGHT - inset
  const bottom = HEIGHT - inset
  const dx = Math.max(left + radius - x, x - (right - radius))
  const dy = y - (bottom - radius)
  if (dx > 0 && dy > 0) return Math.hypot(dx, dy) - radius
  return Math.max(left - x, x - right, y - bottom)
}

/** Colour of a point in the picture's own units; null is clear. */
function colourAt(x: number, y: number, level: number | null): Colour | null {
  const onLimit = Math.abs(y - LIMIT_Y)
  if (onLimit < 0.65) return INK
  const outer = vesselDistance(x, y, 0)
  if (outer <= 0 && vesselDistance(x, y, WALL) > 0 && y > 0.5) return INK
  // a full glass is cut by a gap at the limit, so that the line stays visible
  if (level !== null && level > 1 && onLimit < 1.7) return null
  if (level === null || vesselDistance(x, y, INSET) > 0) return null
  const top = HEIGHT - (HEIGHT * Math.min(level, RIM - 0.05)) / RIM
  return y >= top ? fillColour(x, y, level) : null
}

/** One pixel: the mean of its samples, alpha by how many of them are drawn. */
function pixel(px: number, py: number, level: number | null): Rgba {
  let [r, g, b, drawn] = [0, 0, 0, 0]
  for (let i = 0; i < SAMPLES * SAMPLES; i++) {
    const x = (px + ((i % SAMPLES) + 0.5) / SAMPLES) / GLASS_SCALE
    const y = (py + (Math.floor(i / SAMPLES) + 0.5) / SAMPLES) / GLASS_SCALE
    const colour = colourAt(x, y, level)
    if (!colour) continue
    r += colour[0]
    g += colour[1]
    b += colour[2]
    drawn++
  }
  if (drawn === 0) return [0, 0, 0, 0]
  const alpha = Math.round((255 * drawn) / (SAMPLES * SAMPLES))
  return [Math.round(r / drawn), Math.round(g / drawn), Math.round(b / drawn), alpha]
}

/** The level glass as a picture for mail: 0 outdoor air, 1 the limit, null nothing heard. */
export function glassPng(level: number | null): Buffer {
  const { width, height } = GLASS_SIZE
  return encodePng(width * GLASS_SCALE, height * GLASS_SCALE, (x, y) => pixel(x, y, level))
}

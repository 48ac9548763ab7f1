/**
 * Random numbers by address: the same seed and address always give the same number, whatever was drawn before, so that a
 * demo resumed after a week goes on exactly as it would have. Mixing steps are the finaliser of MurmurHash3 (public domain).
 */

/** 32-bit hash of a text (FNV-1a), for stream names. */
export function hashText(text: string): number {
  let h = 0x811c9dc5
  for (let i = 0; i < text.length; i++) {
    h ^= text.charCodeAt(i)
    h = Math.imul(h, 0x01000193)
  }
  return h >>> 0
}

function mix(h: number): number {
  let x = h
  x ^= x >>> 16
  x = Math.imul(x, 0x85ebca6b)
  x ^= x >>> 13
  x = Math.imul(x, 0xc2b2ae35)
  x ^= x >>> 16
  return x >>> 0
}

/** 32-bit hash of a seed, a stream and a position within it. */
export function hashAt(seed: number, stream: number, position: number): number {
  const low = position >>> 0
  const high = Math.floor(position / 4294967296) >>> 0
  return mix(mix(mix(seed ^ 0x9e3779b9) + stream) ^ Math.imul(low, 0x27d4eb2f) ^ mix(high + 0x165667b1))
}

/** Uniform on the open interval 0 to 1. */
export function uniformAt(seed: number, stream: number, position: number): number {
  return (hashAt(seed, stream, position) + 0.5) / 4294967296
}

/** Standard normal by the Box–Muller transform of two uniforms at one address. */
export function normalAt(seed: number, stream: number, position: number): number {
  const radius = Math.sqrt(-2 * Math.log(uniformAt(seed, stream, position)))
  return radius * Math.cos(2 * Math.PI * uniformAt(seed, mix(stream + 0x51ed270b), position))
}

/** Smooth noise, mean 0 and standard deviation near 1, knots every `spacingS` seconds, raised-cosine weights between knots. */
export function smoothNoiseAt(seed: number, stream: number, timeS: number, spacingS: number): number {
  const knot = Math.floor(timeS / spacingS)
  const w = 0.5 - 0.5 * Math.cos((Math.PI * (timeS - knot * spacingS)) / spacingS)
  const sum = (1 - w) * normalAt(seed, stream, knot) + w * normalAt(seed, stream, knot + 1)
  return sum / Math.sqrt((1 - w) * (1 - w) + w * w)
}

/** A generator for one address (seed and keys); draws follow each other. */
export type Draws = {
  uniform(): number
  normal(): number
  between(low: number, high: number): number
  /** whole number, both ends included */
  whole(low: number, high: number): number
  chance(probability: number): boolean
}

/** Opens the generator at an address made of the seed and any keys (names, dates). */
export function drawsFor(seed: number, ...keys: (string | number)[]): Draws {
  const stream = hashText(keys.join('|'))
  let position = 0
  const uniform = () => uniformAt(seed, stream, position++)
  return {
    uniform,
    normal: () => normalAt(seed, stream, position++),
    between: (low, high) => low + (high - low) * uniform(),
    whole: (low, high) => low + Math.floor((high - low + 1) * uniform()),
    chance: (probability) => uniform() < probability,
  }
}

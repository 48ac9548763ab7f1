/** A seeded generator: the same seed gives the same numbers on every machine. */

export type SeededRandom = {
  /** uniform in [0, 1) */
  uniform(): number
  /** uniform in [low, high) */
  between(low: number, high: number): number
  /** whole number in low..high, both included */
  whole(low: number, high: number): number
  /** standard normal deviate */
  normal(): number
}

/** Builds a generator from a whole-number seed (mulberry32 by T. Ettinger, public domain; Box and Muller 1958 for normals). */
export function seededRandom(seed: number): SeededRandom {
  let state = seed >>> 0
  let spare: number | null = null
  const uniform = () => {
    state = (state + 0x6d2b79f5) >>> 0
    let mixed = state
    mixed = Math.imul(mixed ^ (mixed >>> 15), mixed | 1)
    mixed ^= mixed + Math.imul(mixed ^ (mixed >>> 7), mixed | 61)
    return ((mixed ^ (mixed >>> 14)) >>> 0) / 4294967296
  }
  const normal = () => {
    if (spare !== null) {
      const kept = spare
      spare = null
      return kept
    }
    const radius = Math.sqrt(-2 * Math.log(1 - uniform()))
    const angle = 2 * Math.PI * uniform()
    spare = radius * Math.sin(angle)
    return radius * Math.cos(angle)
  }
  return {
    uniform,
    normal,
    between: (low, high) => low + (high - low) * uniform(),
    whole: (low, high) => low + Math.floor((high - low + 1) * uniform()),
  }
}

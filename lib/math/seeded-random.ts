/** A repeatable source of random numbers: the same seed gives the same sequence on every machine. */
export type SeededRandom = {
  /** uniform in [0, 1) */
  uniform(): number
  /** standard normal (Box & Muller 1958) */
  normal(): number
  /** whole number in [0, n) */
  integer(n: number): number
}

/**
 * Seeded generator (sfc32, a 128-bit chaotic counter generator by C. Doty-Humphrey; published form from memory). Not for secrets.
 * @param seed any finite number; numbers that differ only past 2^32 share a sequence
 */
export function seededRandom(seed: number): SeededRandom {
  let a = 0x9e3779b9
  let b = 0x243f6a88
  let c = seed | 0
  let counter = 1
  const next = () => {
    const sum = (((a + b) | 0) + counter) | 0
    counter = (counter + 1) | 0
    a = b ^ (b >>> 9)
    b = (c + (c << 3)) | 0
    c = (c << 21) | (c >>> 11)
    c = (c + sum) | 0
    return (sum >>> 0) / 4294967296
  }
  // neighbouring seeds start alike; twenty rounds part them
  for (let round = 0; round < 20; round++) next()
  let spare: number | null = null
  const normal = () => {
    if (spare !== null) {
      const value = spare
      spare = null
      return value
    }
    const radius = Math.sqrt(-2 * Math.log(1 - next()))
    const angle = 2 * Math.PI * next()
    spare = radius * Math.sin(angle)
    return radius * Math.cos(angle)
  }
  return { uniform: next, normal, integer: (n) => Math.floor(next() * n) }
}

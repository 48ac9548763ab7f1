/** Seeded random numbers for the truth generator. One label, one stream: adding a room never changes another. */
export type Random = {
  uniform(low: number, high: number): number
  logUniform(low: number, high: number): number
  /** low ≤ n ≤ high */
  integer(low: number, high: number): number
  normal(mean: number, sd: number): number
  chance(probability: number): boolean
  pick<T>(list: readonly T[]): T
  fork(label: string): Random
}

/** 32-bit FNV-1a hash of a label: turns a name into a seed. */
function hash(label: string): number {
  let value = 0x811c9dc5
  for (let i = 0; i < label.length; i++) value = Math.imul(value ^ label.charCodeAt(i), 0x01000193)
  return value >>> 0
}

/** Small fast counting generator sfc32 (C. Doty-Humphrey, PractRand), seeded from a label. */
function sfc32(label: string): () => number {
  let a = hash(label)
  let b = hash(`${label}/b`)
  let c = hash(`${label}/c`)
  let d = 1
  const next = () => {
    const t = (((a + b) | 0) + d) | 0
    d = (d + 1) | 0
    a = b ^ (b >>> 9)
    b = (c + (c << 3)) | 0
    c = (c << 21) | (c >>> 11)
    c = (c + t) | 0
    return (t >>> 0) / 4294967296
  }
  for (let i = 0; i < 15; i++) next()
  return next
}

/** A stream of random numbers that depends on the label alone. */
export function randomFrom(label: string): Random {
  const next = sfc32(label)
  let spare: number | null = null
  const standardNormal = () => {
    if (spare !== null) {
      const kept = spare
      spare = null
      return kept
    }
    const radius = Math.sqrt(-2 * Math.log(1 - next()))
    const angle = 2 * Math.PI * next()
    spare = radius * Math.sin(angle)
    return radius * Math.cos(angle)
  }
  return {
    uniform: (low, high) => low + (high - low) * next(),
    logUniform: (low, high) => low * (high / low) ** next(),
    integer: (low, high) => low + Math.floor(next() * (high - low + 1)),
    normal: (mean, sd) => mean + sd * standardNormal(),
    chance: (probability) => next() < probability,
    pick: (list) => list[Math.floor(next() * list.length)]!,
    fork: (part) => randomFrom(`${label}/${part}`),
  }
}

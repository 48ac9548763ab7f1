/**
 * One step of a first-order instrument, y' = (x − y)/τ, exact for an input that moves on a straight line from x0 to x1.
 * Returns the indication after `stepS` seconds.
 */
export function laggedStep(y: number, x0: number, x1: number, stepS: number, tauS: number): number {
  if (tauS <= 0) return x1
  const slope = (x1 - x0) / stepS
  const steady = x1 - slope * tauS
  return steady + (y - (x0 - slope * tauS)) * Math.exp(-stepS / tauS)
}

/** Rounds to the instrument's resolution and holds it within its range. */
export function indicated(ppm: number, resolutionPpm: number, rangeMaxPpm: number): number {
  const rounded = Math.round(ppm / resolutionPpm) * resolutionPpm
  return Math.min(rangeMaxPpm, Math.max(1, rounded))
}

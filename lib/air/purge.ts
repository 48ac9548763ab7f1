/**
 * Seconds to flush the given share of the excess out of an empty, well-mixed room: t = ln(1 / (1 − share)) / A. Pass the rate's lower
 * end for a promise, e.g. before the next meeting.
 * @throws RangeError when the rate is not positive or the share is outside [0, 1)
 * @source single-zone decay; 99 % at 6/h is the 46 min of the CDC clearance table (from memory)
 */
export function purgeTimeS(airChangeRatePerHour: number, removedShare: number): number {
  if (!(airChangeRatePerHour > 0))
    throw new RangeError(`rate must be positive, got ${airChangeRatePerHour} 1/h`)
  if (!(removedShare >= 0 && removedShare < 1))
    throw new RangeError(`share must be in [0, 1), got ${removedShare}`)
  return (-Math.log1p(-removedShare) / airChangeRatePerHour) * 3600
}

/**
 * Seconds until an empty room falls from one CO2 level to another; 0 when it is already there, null when the target is at or below what
 * its replacement air holds.
 */
export function timeToLevelS(input: {
  co2Ppm: number
  targetPpm: number
  backgroundPpm: number
  airChangeRatePerHour: number
}): number | null {
  const { co2Ppm, targetPpm, backgroundPpm, airChangeRatePerHour } = input
  if (co2Ppm <= targetPpm) return 0
  if (targetPpm <= backgroundPpm) return null
  return purgeTimeS(airChangeRatePerHour, 1 - (targetPpm - backgroundPpm) / (co2Ppm - backgroundPpm))
}

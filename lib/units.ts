/** Conversions between the units people read and the SI units used inside. All factors are exact or stated. */

export const SECONDS_PER_HOUR = 3600
export const SECONDS_PER_DAY = 86_400

/** Litres per second in one cubic foot per minute (0.3048 m cubed over 60 s, exact to the digits given). */
export const LITRES_PER_SECOND_PER_CFM = 0.4719474432

/** Air flow in L/s from an air-change rate (1/h) and a volume (m3): Q = A V / 3.6. */
export function flowLitresPerSecond(airChangeRatePerHour: number, volumeM3: number): number {
  return (airChangeRatePerHour * volumeM3) / 3.6
}

/** Air-change rate (1/h) from a flow (L/s) and a volume (m3). */
export function airChangeRateFromFlow(flowLps: number, volumeM3: number): number {
  return (flowLps * 3.6) / volumeM3
}

/** Litres per second to cubic feet per minute. */
export function litresPerSecondToCfm(flowLps: number): number {
  return flowLps / LITRES_PER_SECOND_PER_CFM
}

/** Cubic metres to cubic feet. */
export function cubicMetresToCubicFeet(volumeM3: number): number {
  return volumeM3 / 0.3048 ** 3
}

/** Square metres to square feet. */
export function squareMetresToSquareFeet(areaM2: number): number {
  return areaM2 / 0.3048 ** 2
}

/** Mean age of air in minutes of a well-mixed space with this air-change rate (1/h). */
export function meanAgeMinutes(airChangeRatePerHour: number): number {
  return 60 / airChangeRatePerHour
}

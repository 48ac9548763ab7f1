import { type Basis, personsForFlow } from './targets'

/** Shown with every number of people a room's ventilation supports. */
export const OCCUPANCY_CAUTION =
  'For ventilation only. Fire-safety and licensed occupancy limits may be lower and take precedence.'

export type Supports =
  | {
      persons: number
      /** what set the number */
      limitedBy: 'ventilation' | 'permitted occupancy'
      caution: typeof OCCUPANCY_CAUTION
    }
  | { persons: null; missing: string }

export type SupportsInput = {
  /** lower end of the 95 % interval of the outdoor flow, L/s; null when it is not known (a dilution rate, or no figure) */
  flowLowLps: number | null
  basis: Basis | null
  floorAreaM2: number | null
  permittedOccupancy: number | null
}

/**
 * How many people the room's ventilation supports: from the flow's lower end, rounded down, never above the entered permitted occupancy,
 * and never without the caution.
 * @returns persons null with what is missing when no number can be given
 * @source the basis (targets); the rounding and the cap are this product's own caution
 */
export function personsSupported(input: SupportsInput): Supports {
  if (input.basis === null) return { persons: null, missing: 'basis' }
  if (input.flowLowLps === null) return { persons: null, missing: 'outdoor flow' }
  const byFlow = personsForFlow(input.basis, input.flowLowLps, input.floorAreaM2)
  if (byFlow === null) {
    const perPerson = input.basis.kind === 'design-flow' ? 'a basis with a flow per person' : 'floor area'
    return { persons: null, missing: perPerson }
  }
  const permitted = input.permittedOccupancy
  const capped = permitted !== null && permitted < byFlow
  return {
    persons: capped ? Math.max(0, Math.floor(permitted)) : byFlow,
    limitedBy: capped ? 'permitted occupancy' : 'ventilation',
    caution: OCCUPANCY_CAUTION,
  }
}

/**
 * CO2 (ppm) that the room tends to with `persons` in it: Cb + 10^6 n g / Q.
 * @throws RangeError when the flow is not positive
 * @source single-zone mass balance (ASTM D6245; methods T18)
 */
export function equilibriumCo2Ppm(input: {
  backgroundPpm: number
  persons: number
  generationLpsPerPerson: number
  flowLps: number
}): number {
  if (!(input.flowLps > 0)) throw new RangeError(`flow must be positive, got ${input.flowLps} L/s`)
  return input.backgroundPpm + (1e6 * input.persons * input.generationLpsPerPerson) / input.flowLps
}

/**
 * Seconds from now until the room reaches a limit with constant people and flow; 0 when it is already there, null when it never will.
 * @source exponential step response of the single-zone balance
 */
export function timeToLimitS(input: {
  co2Ppm: number
  limitPpm: number
  equilibriumPpm: number
  airChangeRatePerHour: number
}): number | null {
  const { co2Ppm, limitPpm, equilibriumPpm, airChangeRatePerHour } = input
  if (co2Ppm >= limitPpm) return 0
  if (equilibriumPpm <= limitPpm || !(airChangeRatePerHour > 0)) return null
  const left = (equilibriumPpm - limitPpm) / (equilibriumPpm - co2Ppm)
  return (-Math.log(left) / airChangeRatePerHour) * 3600
}

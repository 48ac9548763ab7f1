/** Density (kg/m³) and heat capacity (J/(kg K)) of room air; heat of evaporation of water (J/g), as used in the product's figures. */
const AIR_DENSITY_KG_PER_M3 = 1.2
const AIR_HEAT_CAPACITY_J_PER_KG_K = 1005
const EVAPORATION_J_PER_G = 2501

/** Heat that a flow (L/s) carries per kelvin, W: 1.206 W per L/s. */
export function sensiblePowerW(flowLps: number, temperatureDifferenceK: number): number {
  return (flowLps / 1000) * AIR_DENSITY_KG_PER_M3 * AIR_HEAT_CAPACITY_J_PER_KG_K * temperatureDifferenceK
}

/** Heat of drying (or moistening) a flow by so many grams of water per kilogram of air, W. */
export function latentPowerW(flowLps: number, humidityDifferenceGPerKg: number): number {
  return (flowLps / 1000) * AIR_DENSITY_KG_PER_M3 * EVAPORATION_J_PER_G * humidityDifferenceGPerKg
}

function share(name: string, value: number, most: number): void {
  if (!(value >= 0 && value <= most))
    throw new RangeError(`${name} must lie between 0 and ${most}, got ${value}`)
}

/**
 * Heat to warm an outdoor flow, kWh: 1.206 W/(L/s K) × flow × degree-hours × (1 − recovery) / plant efficiency. Degree-hours (K h) are
 * those of the hours in which the air was moved, not a whole year's.
 * @throws RangeError when recovery is outside 0..1 or the plant's efficiency is not positive
 * @source sensible heat balance; an estimate that leaves out latent heat, leakage and free gains
 */
export function heatingEnergyKWh(input: {
  flowLps: number
  degreeHoursKh: number
  heatRecovery?: number
  plantEfficiency?: number
}): number {
  const { flowLps, degreeHoursKh, heatRecovery = 0, plantEfficiency = 1 } = input
  share('heat recovery', heatRecovery, 1)
  if (!(plantEfficiency > 0)) throw new RangeError('plant efficiency must be positive')
  return (sensiblePowerW(flowLps, 1) * degreeHoursKh * (1 - heatRecovery)) / (1000 * plantEfficiency)
}

/**
 * Fan energy, kWh: specific fan power (kW per m³/s) × flow × hours.
 * @throws RangeError when an input is negative
 */
export function fanEnergyKWh(input: {
  flowLps: number
  specificFanPowerKWPerM3S: number
  hours: number
}): number {
  const { flowLps, specificFanPowerKWPerM3S, hours } = input
  if (!(flowLps >= 0 && specificFanPowerKWPerM3S >= 0 && hours >= 0)) {
    throw new RangeError('flow, specific fan power and hours must not be negative')
  }
  return specificFanPowerKWPerM3S * (flowLps / 1000) * hours
}

export type SpareAir = {
  /** outdoor flow beyond what was asked for, L/s, with its 95 % limits */
  flowLps: { value: number; low: number; high: number }
  hours: number
  degreeHoursKh: number
  heatRecovery?: number
  plantEfficiency?: number
  specificFanPowerKWPerM3S?: number
  heatPricePerKWh: number
  electricityPricePerKWh: number
}

export type SpareEnergy = { heatKWh: number; fanKWh: number; cost: number }

/** Heat, fan energy and cost of air moved beyond need (a room empty, or above its basis), at the flow's value and at both its limits. */
export function spareAirEnergy(input: SpareAir): { value: SpareEnergy; low: SpareEnergy; high: SpareEnergy } {
  const at = (flow: number): SpareEnergy => {
    const flowLps = Math.max(0, flow)
    const heatKWh = heatingEnergyKWh({ ...input, flowLps })
    const fanKWh = fanEnergyKWh({
      flowLps,
      hours: input.hours,
      specificFanPowerKWPerM3S: input.specificFanPowerKWPerM3S ?? 0,
    })
    return { heatKWh, fanKWh, cost: heatKWh * input.heatPricePerKWh + fanKWh * input.electricityPricePerKWh }
  }
  return { value: at(input.flowLps.value), low: at(input.flowLps.low), high: at(input.flowLps.high) }
}

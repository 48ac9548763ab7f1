import { hashText, smoothNoiseAt } from '../random'

const YEAR_S = 365.2425 * 86400
/** 2026-01-01T00:00:00Z */
const DATED_S = 1767225600
const slow = hashText('outdoor co2 over days')
const quick = hashText('outdoor co2 over hours')
const warmth = hashText('outdoor temperature')

/**
 * CO2 of the air on the roof, ppm: 434 at the start of 2026 and 2.7 more a year, a season of 4, a day of 6 (most before dawn) and
 * weather on scales of 6 and 36 hours. A plausible town, not a record of one.
 */
export function outdoorCo2Ppm(seed: number, timeS: number): number {
  const year = (timeS - DATED_S) / YEAR_S
  const season = 4 * Math.cos(2 * Math.PI * (year - 0.3))
  const day = 6 * Math.cos((2 * Math.PI * (timeS - 5 * 3600)) / 86400)
  const weather =
    6 * smoothNoiseAt(seed, slow, timeS, 36 * 3600) + 3 * smoothNoiseAt(seed, quick, timeS, 21600)
  return 434 + 2.7 * year + season + day + weather
}

/** Outdoor temperature, °C, of a mild northern town. */
export function outdoorTemperatureC(seed: number, timeS: number): number {
  const year = (timeS - DATED_S) / YEAR_S
  const season = -6.5 * Math.cos(2 * Math.PI * (year - 0.06))
  const day = -3.2 * Math.cos((2 * Math.PI * (timeS - 3 * 3600)) / 86400)
  return 10.5 + season + day + 2.4 * smoothNoiseAt(seed, warmth, timeS, 86400)
}

/** Water vapour at saturation, g/m³, by the Magnus formula and the ideal-gas law. */
export function saturationGramsPerM3(temperatureC: number): number {
  const pressureHPa = 6.112 * Math.exp((17.62 * temperatureC) / (243.12 + temperatureC))
  return (216.7 * pressureHPa) / (273.15 + temperatureC)
}

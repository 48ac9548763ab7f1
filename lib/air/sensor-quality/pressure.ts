/** Conditions at which a sensor that does not compensate is right. */
const CALIBRATED_KPA = 101.325
const CALIBRATED_K = 298.15

/**
 * Air pressure (kPa) at an altitude in the standard atmosphere: 101.325 (1 − 2.25577e−5 z)^5.25588.
 * @throws RangeError outside −500 to 9000 m
 * @source ISA / ICAO standard atmosphere, troposphere form
 */
export function pressureAtAltitudeKPa(altitudeM: number): number {
  if (!(altitudeM >= -500 && altitudeM <= 9000)) {
    throw new RangeError(`altitude must lie between −500 and 9000 m, got ${altitudeM}`)
  }
  return CALIBRATED_KPA * (1 - 2.25577e-5 * altitudeM) ** 5.25588
}

/**
 * Factor on the reading of an optical sensor that sees number density but was calibrated at 101.325 kPa and 25 °C: (101.325/P) (T/298.15).
 * Leave the temperature out where the sensor compensates for it itself, as most do.
 * @throws RangeError when pressure or temperature is not plausible
 * @source ideal gas law
 */
export function pressureFactor(pressureKPa: number, temperatureK = CALIBRATED_K): number {
  if (!(pressureKPa > 30 && pressureKPa < 120))
    throw new RangeError(`pressure must be in kPa, got ${pressureKPa}`)
  if (!(temperatureK > 200 && temperatureK < 350)) {
    throw new RangeError(`temperature must be in kelvin, got ${temperatureK}`)
  }
  return (CALIBRATED_KPA / pressureKPa) * (temperatureK / CALIBRATED_K)
}

export {
  type BaselineStep,
  findBaselineSteps,
  findDrift,
  findOwnDrift,
  type NightLow,
  offsetAgainstFellows,
  type SensorDrift,
  type SensorOffset,
} from './lows'
export { pressureAtAltitudeKPa, pressureFactor } from './pressure'
export {
  fastestRisePpmPerMin,
  findSpikes,
  findStuck,
  outOfRangeShares,
  PLAUSIBLE_ROOM_PPM,
  type Stretch,
  type StuckOptions,
} from './readings'

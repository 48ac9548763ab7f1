export { type BeforeAfter, compareBeforeAfter } from './compare'
export { type DriftOptions, findRateDrift, type RateDrift } from './drift'
export { dayNoise, type RateDay, withoutWeekendPattern } from './series'
export { findRateSteps, lastChangeNight, type RateStep, type StepOptions } from './steps'

import type { DayRate } from '../day-rates'
import type { RateDay } from './series'

/** The measured days (not those known only as bounds) of `dayRates`, as the series that changes are looked for in. */
export function measuredDays(days: readonly DayRate[]): RateDay[] {
  return days.flatMap((day) => (day.lowLn === day.highLn ? [{ night: day.night, lnRate: day.lowLn }] : []))
}

/** The nouns of the science: plain data, SI units, epoch seconds. Everything in lib/air speaks these types. */

/** A sensor's record: `timeS` (epoch seconds, rising) and `co2Ppm` of equal length. Nothing in it is ever filled. */
export type Series = { readonly timeS: Float64Array; readonly co2Ppm: Float64Array }

export type AirSystem = 'outdoor' | 'recirculating' | 'natural' | 'unknown'

/** What a sensor is able to say; defaults are in lib/air/constants.ts. */
export type SensorSpec = {
  accuracyPpm?: number
  accuracyPct?: number
  resolutionPpm?: number
  rangeMaxPpm?: number
  reporting?: 'interval' | 'on-change'
  deadbandPpm?: number
}

/** `from` and `to` are building-local "HH:MM"; days are ISO weekdays (1 = Monday). */
export type SupplyHours = { days: readonly number[]; from: string; to: string }

export type RoomSpec = {
  id: string
  volumeM3: number
  floorAreaM2?: number
  personsMax?: number
  altitudeM?: number
  /** id of a room whose air reaches this one */
  neighbour?: string
  /** rooms on one air handler name it alike */
  airHandler?: string
  air?: AirSystem
  supplyHours?: readonly SupplyHours[]
  sensor?: SensorSpec
}

export type SupplyState = 'on' | 'reduced' | 'off'
/** A supply-status signal: the state that holds from `timeS` until the next change. */
export type SupplyChange = { timeS: number; state: SupplyState; outdoorFraction?: number }

export const MODES = ['supply on', 'supply reduced', 'supply off', 'natural', 'unknown'] as const
export type Mode = (typeof MODES)[number]
export type ModeOrigin = 'status' | 'inferred' | 'schedule'

export const REASONS = [
  'start-too-low',
  'too-short',
  'too-few-points',
  'gap',
  'people-present',
  'rate-changing',
  'demand-controlled',
  'background-unknown',
  'recirculation-possible',
  'neighbour-coupled',
  'sensor-suspect',
  'saturated',
  'clock',
  'too-fast',
  'too-slow',
  'not-identifiable',
] as const
export type Reason = (typeof REASONS)[number]

export type Quality = 'accepted' | 'doubtful' | 'refused'
export type EstimateKind = 'fit' | 'at-least' | 'at-most' | 'range'
export type BackgroundOrigin =
  | 'own record'
  | 'outdoor sensor'
  | 'quiet nights'
  | 'neighbour'
  | 'default'
  | 'fitted'

/** One check the decay page lists: what was asked, what was found. `found` and `asked` are ready-made words with units. */
export type Check = { name: string; found: string; asked: string; passes: boolean }

/** CO2 of the air that replaces room air. */
export type Background = { ppm: number; standardUncertaintyPpm: number; origin: BackgroundOrigin }

/**
 * One decay of one sensor. A refused decay has every rate null; `at-least` has rate and high null, `at-most` rate and low null.
 * Rates are per hour with 95 % limits; uncertainty parts are standard uncertainties of ln(rate).
 */
export type Decay = {
  roomId: string
  /** building-local date on which the decay starts, YYYY-MM-DD */
  night: string
  startS: number
  endS: number
  kind: EstimateKind
  airChangeRatePerHour: number | null
  airChangeRateLowPerHour: number | null
  airChangeRateHighPerHour: number | null
  /** null unless coupled or recirculating */
  outdoorRateLowPerHour: number | null
  outdoorRateHighPerHour: number | null
  background: Background | null
  startPpm: number
  endPpm: number
  /** 60 / rate: local mean age of air if the room is well mixed, minutes */
  meanAgeMin: number | null
  mode: Mode
  modeFrom: ModeOrigin | null
  quality: Quality
  reasons: Reason[]
  rateChangeAtS: number | null
  rateChangeLowS: number | null
  rateChangeHighS: number | null
  /** when the last person is thought to have left; null when not seen */
  lastPersonLeftS: number | null
  points: number
  /** lag-one correlation of the residuals and the independent readings they are worth */
  lagOneCorrelation: number | null
  effectivePoints: number | null
  residualSdPpm: number | null
  uncertaintyParts: { regression: number; background: number; model: number } | null
  checks: Check[]
  /** one plain sentence in product words */
  sentence: string
}

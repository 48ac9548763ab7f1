/**
 * The science's settings: value, unit, where it comes from. "practice" is common engineering practice without a normative source;
 * "chosen" is our own choice, checked by the recovery and coverage suites.
 */

/** Outdoor CO2 with its date: remote-site yearly means 421 (2023) and 425 (2024) growing about 3 ppm a year, plus a town's share. */
export const DEFAULT_OUTDOOR = { ppm: 432, standardUncertaintyPpm: 15, date: '2026-01' } as const

/** Readings outside this range are no room air (ppm; practice). */
export const PLAUSIBLE_PPM = { low: 300, high: 20_000 } as const
/** An empty room's floor outside this range speaks of the sensor, not of the air (ppm; practice). */
export const PLAUSIBLE_FLOOR_PPM = { low: 375, high: 560 } as const

/** Sensor defaults: data-sheet accuracy of wall-mounted infrared sensors, as a 95 % half-width (practice). */
export const DEFAULT_SENSOR = { accuracyPpm: 40, accuracyPct: 3, resolutionPpm: 1 } as const

/** Detection (chosen). */
export const DETECTION = {
  /** width of the bins that peaks and troughs are looked for in, seconds */
  binS: 300,
  /** a turning point must stand out by this much, ppm, and by this many noise deviations of a bin */
  prominencePpm: 18,
  prominenceSigmas: 5,
  /** a fall shorter than this is not reported, not even as refused, ppm */
  leastDropPpm: 70,
  /** nothing is read across a silence longer than this, seconds */
  silenceS: 2700,
  /** bins of a fit: the first is so small a part of the fall, and each is wider than the last by this share of the time gone by */
  fitBins: 200,
  binGrowth: 0.035,
} as const

/**
 * Imperfect mixing as a sensor sees it: standard deviation as a share of the excess, correlation time, and how many blocks of residuals that
 * expectation is worth against a record's own (chosen; typical of one-minute records in occupied rooms).
 */
export const MIXING = { share: 0.008, correlationS: 360, priorDegrees: 8, leastVariance: 0.4 } as const

/** Gates of a usable decay (practice; methods of tracer decay, see E741 and ISO 12569 for the two-point minimum A T = 1). */
export const GATES = {
  /** smallest excess at the start, ppm, and in standard uncertainties of the background and the noise */
  startExcessPpm: 110,
  startExcessSigmas: 8,
  /** below this start, a rate that no other decay of the room shows is doubtful, ppm */
  lonelyExcessPpm: 260,
  /** least fall in time constants */
  timeConstants: 0.35,
  durationS: 900,
  points: 5,
  /** below this many readings in two and a half time constants the start is too uncertain for an accepted figure */
  tellingPoints: 6,
  /** the same where the fall is broken off early */
  tellingPointsShort: 8,
  /** a step down by less than this ratio, that no fellow shares, is doubtful */
  mildStep: 2,
  /** residuals this many times the variance that noise and mixing explain speak of something else in the room */
  misfit: 4,
  /** largest gap as a share of the window */
  gapShare: 0.3,
  /** relative half-width of the 95 % interval up to which a figure is accepted, and up to which it is given at all */
  acceptedHalfWidth: 0.25,
  doubtfulHalfWidth: 0.6,
} as const

/**
 * What is not known of the background (chosen): the daily course of town air and a sensor's slow baseline between the hour of a resting level
 * and the hour wanted (less where an outdoor record is followed), the same between nights, and the offset between two sensors of ordinary make.
 */
export const BACKGROUND = {
  wanderPpm: 11,
  wanderFollowedPpm: 8,
  wanderS: 6 * 3600,
  otherNightPpm: 12,
  driftPpmPerHour: 5,
  zeroDriftPpmPerHour: 1.5,
  sensorOffsetPpm: 18,
  leastPpm: 5,
} as const

/**
 * Somebody inside (chosen): how likely before the readings are weighed, when the room fills again within hours, when it stays quiet, and when it ebbs faster afterwards; and the
 * probabilities from which a figure is doubtful, or not given.
 */
export const PEOPLE = {
  beforeDay: 0.5,
  beforeQuiet: 0.12,
  beforeSlow: 0.93,
  mostSlowEvidence: 4,
  quietS: 4 * 3600,
  doubtful: 0.04,
  refused: 0.6,
} as const

/** A decay held against the room's others, because whoever is inside only makes it slower (chosen; lengths in time constants). */
export const REFERENCE = {
  /** from here on a decay stands by itself */
  longEnough: 2.2,
  /** ratio beyond both intervals that contradicts it */
  margin: 1.05,
  /** how many rates of earlier days are needed, and how far such rates scatter */
  fewest: 3,
  spread: 0.1,
  /** below this it needs company before the room fills again; and in a quiet evening; not where it lasts for so many hours */
  aloneLength: 1.2,
  quietLength: 0.5,
  aloneHours: 4,
  /** how long such company must be */
  supportingLength: 0.7,
  /** until when people seen after it, with no rise between, count as having stayed, seconds; and how much faster it then falls without them */
  heldWithinS: 4200,
  faster: 1.2,
} as const

/** CO2 of one quiet grown person, L/s at room conditions: the smallest source that a test for people must see (Persily and de Jonge 2017, 1.0 met). */
export const QUIET_PERSON_LPS = 0.0042

/** Rates that a building can have, 1/h (chosen; wider than any room). */
export const RATE_LIMITS = { low: 0.01, high: 60 } as const

/** A decay as lists and its page hold it. Instants are epoch seconds. */
import { z } from 'zod'
import { REASONS } from '@/lib/air/types'

const nullableNumber = z.number().nullable()

export const decayQualities = ['accepted', 'doubtful', 'refused'] as const
export const decisions = ['keep', 'leave out', 'keep with window'] as const
export type Decision = (typeof decisions)[number]

export const decaySummarySchema = z.object({
  id: z.string(),
  roomId: z.string(),
  roomNumber: z.string(),
  roomName: z.string(),
  sensor: z.string(),
  position: z.string(),
  night: z.string(),
  startS: z.number(),
  endS: z.number(),
  kind: z.enum(['fit', 'at-least', 'at-most', 'range']),
  rate: nullableNumber,
  rateLow: nullableNumber,
  rateHigh: nullableNumber,
  mode: z.string(),
  modeFrom: z.string().nullable(),
  quality: z.enum(decayQualities),
  reasons: z.array(z.enum(REASONS)),
  sentence: z.string(),
  decision: z.enum(decisions).nullable(),
})
export type DecaySummary = z.infer<typeof decaySummarySchema>

/** What the list of decays may be narrowed to, in the URL. */
export const decayListQuerySchema = z.object({
  building: z.string().optional(),
  show: z.enum(['to review', ...decayQualities, 'all']).default('to review'),
  room: z.string().optional(),
  mode: z.string().optional(),
  weeks: z.coerce.number().int().min(1).max(52).default(4),
  before: z.coerce.number().int().optional(),
})

export const decayCheckSchema = z.object({
  name: z.string(),
  found: z.string(),
  asked: z.string(),
  passes: z.boolean(),
})

export const decayReviewSchema = z.object({
  decision: z.enum(decisions),
  reason: z.string(),
  person: z.string(),
  atS: z.number(),
  fromS: z.number(),
  toS: z.number(),
  rate: nullableNumber,
  rateLow: nullableNumber,
  rateHigh: nullableNumber,
  dataChanged: z.boolean(),
  withdrawn: z.boolean(),
})
export type DecayReview = z.infer<typeof decayReviewSchema>

export const decayDetailSchema = decaySummarySchema.extend({
  timeZone: z.string(),
  volumeM3: z.number(),
  designHeadcount: nullableNumber,
  outdoorRateLow: nullableNumber,
  outdoorRateHigh: nullableNumber,
  isOutdoorAir: z.boolean(),
  background: z
    .object({ ppm: z.number(), standardUncertaintyPpm: z.number(), origin: z.string() })
    .nullable(),
  startPpm: z.number(),
  endPpm: z.number(),
  meanAgeMin: nullableNumber,
  rateChangeS: nullableNumber,
  rateChangeLowS: nullableNumber,
  rateChangeHighS: nullableNumber,
  lastPersonLeftS: nullableNumber,
  points: z.number(),
  lagOneCorrelation: nullableNumber,
  effectivePoints: nullableNumber,
  residualSdPpm: nullableNumber,
  uncertaintyParts: z
    .object({ regression: z.number(), background: z.number(), model: z.number() })
    .nullable(),
  checks: z.array(decayCheckSchema),
  methodVersion: z.string(),
  createdS: z.number(),
  sensorSpec: z.object({
    accuracyPpm: z.number().optional(),
    accuracyPct: z.number().optional(),
    resolutionPpm: z.number().optional(),
    rangeMaxPpm: z.number().optional(),
    reporting: z.enum(['interval', 'on-change']).optional(),
    deadbandPpm: z.number().optional(),
  }),
  intervalS: z.number(),
  /** readings from 90 min before to 120 min after the decay */
  series: z.object({ timeS: z.array(z.number()), co2Ppm: z.array(z.number()) }),
  siblings: z.array(decaySummarySchema),
  reviews: z.array(decayReviewSchema),
  basisRate: nullableNumber,
})
export type DecayDetail = z.infer<typeof decayDetailSchema>

/** One row of the air-change table and its filters, as /api/v1/air-change and the page hold them. */
import { z } from 'zod'
import { MODES } from '@/lib/air/types'

const nullableNumber = z.number().nullable()

export const airChangeWeekSchema = z.object({
  weekStart: z.string(),
  rate: nullableNumber,
  low: nullableNumber,
  high: nullableNumber,
  days: z.number(),
})

export const airChangeRowSchema = z.object({
  roomId: z.string(),
  number: z.string(),
  name: z.string(),
  floor: z.string(),
  floorOrdinal: z.number(),
  tenancy: z.string().nullable(),
  airHandler: z.string().nullable(),
  use: z.string(),
  mode: z.enum(MODES),
  modeFrom: z.string().nullable(),
  /** rate of the last 28 local days since the last change, 1/h; null with a bound, or with nothing to say */
  rate: nullableNumber,
  rateLow: nullableNumber,
  rateHigh: nullableNumber,
  days: z.number(),
  decays: z.number(),
  isDilutionRate: z.boolean(),
  /** minutes, if the room is well mixed */
  meanAgeMin: nullableNumber,
  flowLps: nullableNumber,
  flowLowLps: nullableNumber,
  flowHighLps: nullableNumber,
  basisName: z.string().nullable(),
  basisFlowLps: nullableNumber,
  /** the basis' flow as an air-change rate of this room, 1/h */
  basisRate: nullableNumber,
  floorAreaM2: nullableNumber,
  volumeM3: z.number(),
  designHeadcount: nullableNumber,
  supportsPersons: nullableNumber,
  verdict: z.enum(['short of basis', 'not proven', 'meets basis']),
  verdictSentence: z.string(),
  /** (flow − basis) / basis; null without a flow */
  againstBasis: nullableNumber,
  weeks: z.array(airChangeWeekSchema),
  change: z
    .object({ kind: z.enum(['step', 'drift']), onNight: z.string(), ratio: z.number(), sentence: z.string() })
    .nullable(),
})

export type AirChangeRow = z.infer<typeof airChangeRowSchema>

/** How the table may be asked for, in the page's URL and at the API alike. */
export const airChangeQuerySchema = z.object({
  building: z.string().optional(),
  mode: z.enum(MODES).default('supply on'),
  weeks: z.coerce.number().int().min(4).max(104).default(12),
})

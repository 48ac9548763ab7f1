/** A room as its page and /api/v1/rooms/[room] hold it. Dates are building-local, instants epoch seconds, quantities SI. */
import { z } from 'zod'
import { MODES } from '@/lib/air/types'
import { VERDICTS } from './live-board'
import { POSITIONS, STANDINGS } from './sensors'

const nullableNumber = z.number().nullable()

/** A room's figure of one mode: the 28-day verdict, as the newest night left it. */
export const roomVerdictSchema = z.object({
  mode: z.enum(MODES),
  modeFrom: z.string().nullable(),
  throughNight: z.string(),
  verdict: z.enum(VERDICTS),
  reason: z.string().nullable(),
  sentence: z.string(),
  rate: nullableNumber,
  rateLow: nullableNumber,
  rateHigh: nullableNumber,
  days: z.number(),
  decays: z.number(),
  since: z.string().nullable(),
  isDilutionRate: z.boolean(),
  flowLps: nullableNumber,
  flowLowLps: nullableNumber,
  flowHighLps: nullableNumber,
  basisName: z.string().nullable(),
  basisFlowLps: nullableNumber,
  designHeadcount: nullableNumber,
  supportsPersons: nullableNumber,
  volumeM3: z.number(),
})
export type RoomVerdictRow = z.infer<typeof roomVerdictSchema>

export const roomWeekSchema = z.object({
  weekStart: z.string(),
  mode: z.enum(MODES),
  rate: nullableNumber,
  low: nullableNumber,
  high: nullableNumber,
  days: z.number(),
  decays: z.number(),
  decaysRefused: z.number(),
})
export type RoomWeek = z.infer<typeof roomWeekSchema>

export const roomSensorSchema = z.object({
  deviceId: z.string(),
  label: z.string(),
  position: z.enum(POSITIONS),
  lead: z.boolean(),
  standing: z.enum(STANDINGS),
  standingWords: z.string().nullable(),
  co2Ppm: nullableNumber,
  lastAtS: nullableNumber,
})
export type RoomSensor = z.infer<typeof roomSensorSchema>

export const roomSchema = z.object({
  id: z.string(),
  number: z.string(),
  name: z.string(),
  use: z.string(),
  floor: z.string(),
  tenancy: z.string().nullable(),
  singlePerson: z.boolean(),
  airHandler: z.string().nullable(),
  airSystem: z.enum(['outdoor', 'recirculating', 'natural', 'unknown']),
  limitKind: z.enum(['above outdoor', 'absolute']),
  limitPpm: z.number(),
  limitOrigin: z.string(),
  volumeM3: nullableNumber,
  floorAreaM2: nullableNumber,
  designHeadcount: nullableNumber,
  permittedOccupancy: nullableNumber,
})
export type Room = z.infer<typeof roomSchema>

export const roomChangeSchema = z.object({
  mode: z.enum(MODES),
  kind: z.enum(['step', 'drift']),
  onNight: z.string(),
  ratio: z.number(),
  sentence: z.string(),
})
export type RoomChange = z.infer<typeof roomChangeSchema>

export const roomFindingSchema = z.object({
  kind: z.string(),
  sentence: z.string(),
  firstNight: z.string(),
  lastNight: z.string(),
  nights: z.number(),
})
export type RoomFinding = z.infer<typeof roomFindingSchema>

/** Everything slow about a room. Tenants get it without the parts that speak of air changes. */
export const roomDetailSchema = z.object({
  room: roomSchema,
  verdict: roomVerdictSchema.nullable(),
  weeks: z.array(roomWeekSchema),
  changes: z.array(roomChangeSchema),
  findings: z.array(roomFindingSchema),
  sensors: z.array(roomSensorSchema),
})
export type RoomDetail = z.infer<typeof roomDetailSchema>

/** A decay as a chart marks it. */
export type RoomDecay = {
  id: string
  startS: number
  endS: number
  rate: number | null
  rateLow: number | null
  rateHigh: number | null
  mode: string
  quality: 'accepted' | 'doubtful' | 'refused'
  sentence: string
}

export type ChartPoint = readonly [atS: number, co2Ppm: number]
/** What a room's chart draws: at most as many points as asked for, lowest and highest of each stretch kept. */
export type RoomSeries = {
  fromS: number
  toS: number
  points: ChartPoint[]
  outdoor: ChartPoint[]
  /** a longer pause between two points is a gap and breaks the line */
  gapS: number
}

/** A sensor as lists, its page and /api/v1/sensors hold it. Instants are epoch seconds. */
import { z } from 'zod'

export const STANDINGS = ['sound', 'suspect', 'silent', 'awaiting first reading', 'retired'] as const
export type Standing = (typeof STANDINGS)[number]

export const POSITIONS = ['room', 'exhaust', 'supply', 'outdoor', 'corridor'] as const
export type Position = (typeof POSITIONS)[number]

const nullableNumber = z.number().nullable()

export const sensorRowSchema = z.object({
  deviceId: z.string(),
  label: z.string(),
  standing: z.enum(STANDINGS),
  /** why it is suspect or silent, in words; null when sound */
  standingWords: z.string().nullable(),
  position: z.enum(POSITIONS).nullable(),
  lead: z.boolean(),
  room: z
    .object({
      id: z.string(),
      number: z.string(),
      name: z.string(),
      floor: z.string(),
      floorOrdinal: z.number(),
    })
    .nullable(),
  lastAtS: nullableNumber,
  co2Ppm: nullableNumber,
  batteryPct: nullableNumber,
  rssiDbm: nullableNumber,
  intervalS: z.number(),
  refusedToday: z.number(),
  registeredS: z.number(),
})
export type SensorRow = z.infer<typeof sensorRowSchema>

/** What the list may be narrowed to, in the URL. */
export const sensorListQuerySchema = z.object({
  building: z.string().optional(),
  standing: z.enum(['all', ...STANDINGS]).default('all'),
  floor: z.string().optional(),
  sort: z.enum(['place', 'standing', 'last']).default('place'),
})

/** What an installer waits for after switching a sensor on. */
export const firstReadingSchema = z.object({
  deviceId: z.string(),
  heard: z.boolean(),
  atS: nullableNumber,
  receivedS: nullableNumber,
  co2Ppm: nullableNumber,
  tempC: nullableNumber,
  rhPct: nullableNumber,
  batteryPct: nullableNumber,
  rssiDbm: nullableNumber,
  /** newest refusal of this sensor's messages or connects since registration, with its remedy */
  refused: z
    .object({ reason: z.string(), detail: z.string(), count: z.number(), lastS: z.number() })
    .nullable(),
})
export type FirstReading = z.infer<typeof firstReadingSchema>

/** Refused messages of one hour and reason. */
export const refusalSchema = z.object({
  reason: z.string(),
  detail: z.string(),
  hourS: z.number(),
  count: z.number(),
  sample: z.string().nullable(),
})
export type Refusal = z.infer<typeof refusalSchema>

/** rooms.json: what each room is, checked field by field with the line named. */
import { readFileSync } from 'node:fs'
import { z } from 'zod'
import type { RoomSpec } from '@/lib/air/types'
import { isTimeZone } from '@/lib/time'
import { lineOfPath, lineOfSyntaxError } from './json-lines'
import { InputError } from './problems'

const positive = (what: string) =>
  z.number(`expected ${what} as a number`).positive(`expected ${what} above 0`)
const clock = z
  .string('expected a time HH:MM')
  .regex(/^(([01]\d|2[0-3]):[0-5]\d|24:00)$/, 'expected a time HH:MM')

const sensorShape = z.object({
  accuracy_ppm: positive('accuracy_ppm').optional(),
  accuracy_pct: z
    .number('expected accuracy_pct as a number')
    .min(0, 'expected accuracy_pct of 0 or more')
    .optional(),
  resolution_ppm: positive('resolution_ppm').optional(),
  range_max_ppm: positive('range_max_ppm').optional(),
  reporting: z.enum(['interval', 'on-change'], 'expected reporting "interval" or "on-change"').optional(),
  deadband_ppm: positive('deadband_ppm').optional(),
})

const roomShape = z.object({
  id: z.string('expected id as text').min(1, 'expected an id that is not empty'),
  volume_m3: positive('volume_m3'),
  floor_area_m2: positive('floor_area_m2').optional(),
  persons_max: positive('persons_max').optional(),
  altitude_m: z.number('expected altitude_m as a number').min(-500).max(9000).optional(),
  neighbour: z.string('expected neighbour as the id of a room').optional(),
  air_handler: z.string('expected air_handler as text').optional(),
  air: z
    .enum(
      ['outdoor', 'recirculating', 'natural', 'unknown'],
      'expected air "outdoor", "recirculating", "natural" or "unknown"',
    )
    .optional(),
  supply_hours: z
    .array(
      z.object({
        days: z.array(z.number().int().min(1).max(7), 'expected days as a list of ISO weekdays 1 to 7'),
        from: clock,
        to: clock,
      }),
      'expected supply_hours as a list',
    )
    .optional(),
  sensor: sensorShape.optional(),
})

const fileShape = z.object({
  time_zone: z
    .string('expected time_zone as text')
    .refine(isTimeZone, 'expected an IANA time zone such as "Europe/Lisbon"'),
  rooms: z.array(roomShape, 'expected rooms as a list').min(1, 'expected at least one room'),
})

export type RoomsFile = { timeZone: string; rooms: RoomSpec[] }

function toSpec(room: z.infer<typeof roomShape>): RoomSpec {
  const { sensor } = room
  return {
    id: room.id,
    volumeM3: room.volume_m3,
    floorAreaM2: room.floor_area_m2,
    personsMax: room.persons_max,
    altitudeM: room.altitude_m,
    neighbour: room.neighbour,
    airHandler: room.air_handler,
    air: room.air,
    supplyHours: room.supply_hours,
    sensor: sensor && {
      accuracyPpm: sensor.accuracy_ppm,
      accuracyPct: sensor.accuracy_pct,
      resolutionPpm: sensor.resolution_ppm,
      rangeMaxPpm: sensor.range_max_ppm,
      reporting: sensor.reporting,
      deadbandPpm: sensor.deadband_ppm,
    },
  }
}

function crossProblems(rooms: readonly RoomSpec[]): { path: (string | number)[]; message: string }[] {
  const problems: { path: (string | number)[]; message: string }[] = []
  const seen = new Set<string>()
  const ids = new Set(rooms.map((room) => room.id))
  rooms.forEach((room, i) => {
    if (seen.has(room.id))
      problems.push({ path: ['rooms', i, 'id'], message: `expected each room once, "${room.id}" is doubled` })
    seen.add(room.id)
    if (room.neighbour === undefined) return
    if (!ids.has(room.neighbour) || room.neighbour === room.id) {
      problems.push({
        path: ['rooms', i, 'neighbour'],
        message: `expected the id of another room in this file, not "${room.neighbour}"`,
      })
    }
  })
  return problems
}

/** Reads rooms.json; throws an InputError with one line per problem. */
export function readRoomsFile(file: string): RoomsFile {
  let text: string
  try {
    text = readFileSync(file, 'utf8').replace(/^\uFEFF/, '')
  } catch {
    throw new InputError([`${file}:1: cannot be read: expected a JSON file with time_zone and rooms`])
  }
  let data: unknown
  try {
    data = JSON.parse(text)
  } catch (error) {
    throw new InputError([
      `${file}:${lineOfSyntaxError(text, error)}: not valid JSON: expected { "time_zone": …, "rooms": [ … ] }`,
    ])
  }
  const parsed = fileShape.safeParse(data)
  if (!parsed.success) {
    throw new InputError(
      parsed.error.issues.map((issue) => {
        const path = issue.path as (string | number)[]
        return `${file}:${lineOfPath(text, path)}: ${path.join('.') || 'the file'}: ${issue.message}`
      }),
    )
  }
  const rooms = parsed.data.rooms.map(toSpec)
  const crossed = crossProblems(rooms)
  if (crossed.length > 0) {
    throw new InputError(
      crossed.map(({ path, message }) => `${file}:${lineOfPath(text, path)}: ${path.join('.')}: ${message}`),
    )
  }
  return { timeZone: parsed.data.time_zone, rooms }
}

import { dateOf, type LocalTime, weekdayOf } from './local-time'

/**
 * What went wrong at the mill, each with its date relative to the local day of the demo's first start. Every story can be
 * left out, so that a test can show that a finding stands on the readings and on nothing else.
 */
export const STORY_KEYS = [
  'halfSupply',
  'earlyStop',
  'driftingSensor',
  'silentSensor',
  'nightVentilation',
  'smallRoom',
  'openDoor',
  'cleaners',
] as const
export type StoryKey = (typeof STORY_KEYS)[number]
export type StorySwitches = Partial<Record<StoryKey, boolean>>

export type Story = {
  switches: Record<StoryKey, boolean>
  halfSupply: { room: string; factor: number; fromS: number }
  earlyStop: { airHandler: string; stopsAt: string; documented: string; fromDay: number }
  driftingSensor: { deviceId: string; fromS: number; ppmPerDay: number; atMostPpm: number }
  silentSensor: { deviceId: string; fromS: number }
  nightVentilation: { airHandler: string }
  smallRoom: { room: string; from: number; to: number }
  openDoor: { room: string; exchangeM3PerHour: number }
  cleaners: { from: string }
}

/** Dates the stories from the instant of the first start. */
export function storyFor(firstStartS: number, local: LocalTime, switches: StorySwitches = {}): Story {
  const day = local.at(firstStartS).day
  const on = Object.fromEntries(STORY_KEYS.map((key) => [key, switches[key] !== false]))
  return {
    switches: on as Record<StoryKey, boolean>,
    halfSupply: { room: '2.02', factor: 0.5, fromS: local.instant(day - 21, 10 * 60) },
    earlyStop: { airHandler: 'AH-2', stopsAt: '17:30', documented: '19:00', fromDay: mondayBefore(day - 16) },
    driftingSensor: {
      deviceId: 'sm-205',
      fromS: local.instant(day - 42, 0),
      ppmPerDay: -1.6,
      atMostPpm: 110,
    },
    silentSensor: { deviceId: 'sm-105', fromS: firstStartS - 27 * 3600 },
    nightVentilation: { airHandler: 'AH-5' },
    smallRoom: { room: '1.02', from: 12, to: 16 },
    openDoor: { room: '2.03', exchangeM3PerHour: 190 },
    cleaners: { from: '18:30' },
  }
}

function mondayBefore(day: number): number {
  return day - (weekdayOf(day) - 1)
}

/** The stories in force as records for the truth file. */
export function storyRecords(story: Story): Record<string, unknown>[] {
  const iso = (s: number) => new Date(s * 1000).toISOString().replace('.000Z', 'Z')
  const { halfSupply, earlyStop, driftingSensor, silentSensor, smallRoom, openDoor } = story
  const all: Record<StoryKey, Record<string, unknown>> = {
    halfSupply: { room: halfSupply.room, factor: halfSupply.factor, from: iso(halfSupply.fromS) },
    earlyStop: {
      air_handler: earlyStop.airHandler,
      stops_at: earlyStop.stopsAt,
      documented: earlyStop.documented,
      from_date: dateOf(earlyStop.fromDay),
    },
    driftingSensor: {
      sensor: driftingSensor.deviceId,
      from: iso(driftingSensor.fromS),
      ppm_per_day: driftingSensor.ppmPerDay,
      at_most_ppm: driftingSensor.atMostPpm,
    },
    silentSensor: { sensor: silentSensor.deviceId, from: iso(silentSensor.fromS) },
    nightVentilation: { air_handler: story.nightVentilation.airHandler },
    smallRoom: { room: smallRoom.room, persons_from: smallRoom.from, persons_to: smallRoom.to },
    openDoor: { room: openDoor.room, exchange_m3_per_h: openDoor.exchangeM3PerHour },
    cleaners: { from_about: story.cleaners.from },
  }
  return STORY_KEYS.filter((key) => story.switches[key]).map((key) => ({ kind: key, ...all[key] }))
}

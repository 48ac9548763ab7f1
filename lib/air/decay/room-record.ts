/** One room's record of a day opened for reading: cleaned, its falls found, its backgrounds known; and every fall read. */
import { BACKGROUND, DEFAULT_OUTDOOR } from '@/lib/air/constants'
import type { Background, RoomSpec, SensorSpec, Series } from '@/lib/air/types'
import { type BackgroundInputs, estimateBackground, type OutdoorLevel } from './background'
import { sliceBins } from './bins'
import { type CleanRecord, cleanRecord } from './clean'
import { decoupledRecord, fitCoupled, type Neighbour } from './coupled'
import { type Fall, findFalls, levelTrack, type Track } from './falls'
import { lowestLevel, type QuietFloor, restingLevels } from './floor'
import { type FallReading, fallBins, readFall, usefulEnd } from './read-fall'

export type DayWindow = { date: string; dayStartS: number; dayEndS: number }

export type RoomRecord = {
  room: RoomSpec
  record: CleanRecord
  track: Track
  falls: Fall[]
  lowest: QuietFloor | null
  own: QuietFloor[]
  history: readonly QuietFloor[]
  /** several nights came to rest at one level: what an empty room does, and a room with people in it does not */
  floorsAgree: boolean
}

export type ReadFall = {
  fall: Fall
  reading: FallReading | null
  background: Background
  record: CleanRecord
}

/** Other nights' floors may lie this much below before a resting level is taken for an occupied one, ppm. */
const ABOVE_OTHER_NIGHTS_PPM = 60

/** What the night from local noon to noon left: the first resting level after the evening, else the lowest level seen. */
export function nightsFloor(track: Track, falls: readonly Fall[], day: DayWindow): QuietFloor | null {
  const fromS = day.dayStartS + 43_200
  const toS = day.dayEndS + 43_200
  const lowest = lowestLevel(track, fromS, toS, day.date)
  const resting = restingLevels(track, falls, lowest, day.date)
  return resting.find((floor) => floor.atS >= fromS && floor.atS <= toS) ?? lowest
}

/** Scatter of resting levels up to which they agree, ppm (chosen). */
const AGREEING_PPM = 14

/** What five-minute means scatter beyond the white noise of their readings, ppm. */
function slowNoise(record: CleanRecord, track: Track): number {
  const readings = Math.max(1, 300 / Math.max(1, record.stepS))
  const white = record.sigmaPpm / Math.sqrt(readings)
  return record.onChange ? 0 : Math.sqrt(Math.max(0, track.sigmaPpm ** 2 - 1.3 * white ** 2))
}

/** Opens a room's record for a day; `history` holds the floors of other nights. */
export function openRecord(
  room: RoomSpec,
  series: Series,
  day: DayWindow,
  nights: readonly QuietFloor[] = [],
): RoomRecord {
  const clean = cleanRecord(series, room.sensor)
  const fromS = day.dayStartS - 7200
  const toS = day.dayEndS + 43_200
  const track = levelTrack(clean, fromS, toS)
  const record = { ...clean, slowSdPpm: slowNoise(clean, track) }
  const falls = findFalls(track)
  const lowest = lowestLevel(track, fromS, toS, day.date)
  const history = nights.filter((entry) => entry.date !== day.date)
  const own = restingLevels(track, falls, lowest, day.date, history)
  const nightsLow = Math.min(...history.map((entry) => entry.ppm))
  if (lowest?.reached && own.length === 0 && lowest.ppm < nightsLow + ABOVE_OTHER_NIGHTS_PPM) own.push(lowest)
  return { room, record, track, falls, lowest, own, history, floorsAgree: agree(own, history) }
}

/** Three or more resting levels on at least two nights, scattered by no more than outdoor air does. */
function agree(own: readonly QuietFloor[], history: readonly QuietFloor[]): boolean {
  const reached = [...own, ...history].filter((floor) => floor.reached)
  if (reached.length < 3 || new Set(reached.map((floor) => floor.date)).size < 2) return false
  const levels = reached.map((floor) => floor.ppm)
  const mean = levels.reduce((sum, level) => sum + level, 0) / levels.length
  return Math.sqrt(levels.reduce((sum, level) => sum + (level - mean) ** 2, 0) / levels.length) < AGREEING_PPM
}

export type Surroundings = {
  outdoor?: OutdoorLevel
  defaultOutdoor?: BackgroundInputs['defaultOutdoor']
  /** the record of the room whose air reaches this one */
  neighbour?: RoomRecord
}

/** The background of an opened record at an instant. */
export function backgroundFor(opened: RoomRecord, atS: number, around: Surroundings): Background {
  const { own, lowest, history, room } = opened
  const seen = asSensorReads(around.defaultOutdoor ?? DEFAULT_OUTDOOR, room.altitudeM ?? 0)
  const sensorOffsetPpm = declaredOffset(room.sensor, seen.ppm)
  return estimateBackground({
    own,
    lowest,
    history,
    atS,
    outdoor: around.outdoor,
    defaultOutdoor: seen,
    sensorOffsetPpm,
  })
}

/** Standard uncertainty of a sensor's level from its data sheet (a half-width at 95 %); ordinary where nothing is declared. */
function declaredOffset(sensor: SensorSpec | undefined, level: number): number {
  if (sensor?.accuracyPpm === undefined && sensor?.accuracyPct === undefined)
    return BACKGROUND.sensorOffsetPpm
  return Math.max(8, ((sensor.accuracyPpm ?? 0) + ((sensor.accuracyPct ?? 0) / 100) * level) / 1.96)
}

/**
 * What a sensor at an altitude reads of a known level when nobody says whether it corrects for pressure: anything between the level and the level
 * times the pressure ratio of the standard atmosphere, p / p0 = (1 - 2.25577e-5 z)^5.25588 (z in m).
 */
export function asSensorReads(level: { ppm: number; standardUncertaintyPpm: number }, altitudeM: number) {
  const ratio = (1 - 2.25577e-5 * Math.max(0, altitudeM)) ** 5.25588
  const spread = (level.ppm * (1 - ratio)) / Math.sqrt(12)
  return {
    ppm: (level.ppm * (1 + ratio)) / 2,
    standardUncertaintyPpm: Math.hypot(level.standardUncertaintyPpm, spread),
  }
}

/** Reads every fall that reaches into the day. */
export function readFalls(opened: RoomRecord, day: DayWindow, around: Surroundings): ReadFall[] {
  return opened.falls
    .filter((fall) => fall.toS > day.dayStartS && fall.fromS < day.dayEndS)
    .map((fall) => {
      const atS = fall.fromS + Math.min(5400, (fall.toS - fall.fromS) / 2)
      const background = backgroundFor(opened, atS, around)
      // a decay of the evening before that was over by midnight has nothing to say here
      const over = fall.fromS < day.dayStartS && usefulEnd(opened.record, fall, background) < day.dayStartS
      if (over) return { fall, background, record: opened.record, reading: null }
      if (around.neighbour) {
        const coupled = readCoupled(opened, fall, background, around, atS)
        if (coupled) return coupled
      }
      const { record } = opened
      return { fall, background, record, reading: readFall(record, fall, background) }
    })
}

/** Takes out what the neighbour brought, reads the rest like any fall, then fits both together in each window found. */
function readCoupled(
  opened: RoomRecord,
  fall: Fall,
  background: Background,
  around: Surroundings,
  atS: number,
): ReadFall | null {
  const next = around.neighbour!
  const zero = backgroundFor(next, atS, { outdoor: around.outdoor, defaultOutdoor: around.defaultOutdoor })
  const neighbour: Neighbour = {
    track: next.track,
    backgroundPpm: zero.ppm,
    sdPpm: zero.standardUncertaintyPpm,
  }
  const prior = {
    ppm: background.ppm,
    sdPpm: background.standardUncertaintyPpm,
    driftSdPpmPerHour: BACKGROUND.driftPpmPerHour,
  }
  const bins = fallBins(opened.record, fall, fall.toS, background)
  const late = sliceBins(bins, 0.1, 8)
  const first = fitCoupled(late, neighbour, prior, fall.fromS, { fit: null, ratePerHour: 1 })
  if (!first) return null
  const record = decoupledRecord(opened.record, neighbour, fall.fromS, fall.toS, first)
  const reading = readFall(record, fall, background)
  if (!reading) return null
  const readings = reading.readings.map((own) => {
    const fromH = (own.fromS - fall.fromS) / 3600
    const part = sliceBins(bins, fromH, fromH + Math.max(own.toS - own.fromS, 5400) / 3600)
    const inside = part.timeH[part.timeH.length - 1]! * 3600 + fall.fromS <= fall.toS ? part : bins
    const joint = fitCoupled(inside, neighbour, prior, fall.fromS, {
      fit: own.fit,
      ratePerHour: first.ratePerHour,
    })
    if (!joint) return own
    const { ratePerHour, lowPerHour, highPerHour, misfit } = joint
    const estimate = { ...own.estimate, ratePerHour, lowPerHour, highPerHour, misfit }
    return { ...own, piece: { ...own.piece, ratePerHour }, estimate, demand: null, coupled: joint }
  })
  return {
    fall,
    background: { ...background, origin: 'neighbour' },
    record,
    reading: { ...reading, readings },
  }
}

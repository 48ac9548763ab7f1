import { findEbb } from './room-ebb'
import { LIMIT_AVERAGING_S, type LiveReading, timeOverLimit } from './running-mean'

export type { LiveReading } from './running-mean'

export const ROOM_STATES = [
  'in range',
  'near the limit',
  'over the limit',
  'falling',
  'no signal',
  'sensor suspect',
] as const
/** What a room's live number means. `falling` is falling after people left. */
export type RoomState = (typeof ROOM_STATES)[number]
export type Trend = 'rising' | 'steady' | 'falling'

/** Share of the way from outdoor air to the limit from which a room is near it. */
export const NEAR_LEVEL = 0.85
/** From this level on a reading is unusual whatever the limit (ppm); see the cautions of the product. */
export const UNUSUAL_PPM = 5000

const TREND_PPM_PER_MIN = 1.7
const TREND_SPAN_S = 900
const FORECAST_MIN = 60
const EBB_SPAN_S = 3 * 3600

export type RoomStateInput = {
  nowS: number
  /** readings of the room's lead sensor, rising in time: today's, and at least the last three hours */
  readings: readonly LiveReading[]
  outdoorPpm: number
  /** the limit as a level, ppm (a limit above outdoor air already added to it) */
  limitPpm: number
  sensor: { intervalS: number; suspectSinceS: number | null }
  /** start of the building's local day */
  dayStartS: number
}

export type RoomLive = {
  state: RoomState
  /** newest reading; null when there is none */
  co2Ppm: number | null
  atS: number | null
  /** 0 outdoor air, 1 the limit */
  level: number | null
  trend: Trend | null
  slopePpmPerMin: number | null
  /** since when the 15 min mean has stood above the limit */
  overSinceS: number | null
  overTodayMin: number
  /** minutes until the level reaches the limit at the present slope; null when it does not within the hour */
  limitInMin: number | null
  /** when the fall after people left began */
  emptySinceS: number | null
  /** glass levels every 10 min since then */
  ebbMarks: number[]
  /** 5000 ppm or more */
  unusual: boolean
}

/** Seconds without a reading after which a sensor that reports every `intervalS` has no signal: five of its intervals, at least three minutes. */
export function silentAfterS(intervalS: number): number {
  return Math.max(5 * intervalS, 180)
}

/** The limit as a level in ppm: an absolute one stands, one above outdoor air is added to it. */
export function limitLevelPpm(
  limit: { kind: 'above outdoor' | 'absolute'; ppm: number },
  outdoorPpm: number,
): number {
  return limit.kind === 'absolute' ? limit.ppm : outdoorPpm + limit.ppm
}

/** Fill of a level glass: (C − outdoor) / (limit − outdoor), not below 0. */
export function glassLevel(co2Ppm: number, outdoorPpm: number, limitPpm: number): number {
  return Math.max(0, (co2Ppm - outdoorPpm) / Math.max(1, limitPpm - outdoorPpm))
}

/** Slope of the last 15 min, ppm per minute, by least squares; of the last three readings where those are rarer. Null below three. */
function recentSlope(readings: readonly LiveReading[], nowS: number): number | null {
  const recent = readings.filter((reading) => reading.timeS > nowS - TREND_SPAN_S)
  const used = recent.length >= 3 ? recent : readings.slice(-3)
  const first = used[0]
  const last = used[used.length - 1]
  if (used.length < 3 || !first || !last || last.timeS - first.timeS < 120) return null
  const meanT = used.reduce((sum, r) => sum + r.timeS, 0) / used.length
  const meanC = used.reduce((sum, r) => sum + r.co2Ppm, 0) / used.length
  const sxy = used.reduce((sum, r) => sum + (r.timeS - meanT) * (r.co2Ppm - meanC), 0)
  const sxx = used.reduce((sum, r) => sum + (r.timeS - meanT) ** 2, 0)
  return (60 * sxy) / sxx
}

const trendOf = (slope: number | null): Trend | null => {
  if (slope === null) return null
  if (slope >= TREND_PPM_PER_MIN) return 'rising'
  return slope <= -TREND_PPM_PER_MIN ? 'falling' : 'steady'
}

const nothing: RoomLive = {
  state: 'no signal',
  co2Ppm: null,
  atS: null,
  level: null,
  trend: null,
  slopePpmPerMin: null,
  overSinceS: null,
  overTodayMin: 0,
  limitInMin: null,
  emptySinceS: null,
  ebbMarks: [],
  unusual: false,
}

/**
 * The state of one room now, from its lead sensor's record. First that holds: no signal (by the sensor's own interval), sensor suspect,
 * falling after people left (below the limit), over the limit (15 min mean), near it (from 85 % of the glass), in range.
 */
export function roomState(input: RoomStateInput): RoomLive {
  const { readings, nowS, outdoorPpm, limitPpm, sensor } = input
  const newest = readings[readings.length - 1]
  if (!newest) return nothing
  const silent = nowS - newest.timeS > silentAfterS(sensor.intervalS)
  const level = glassLevel(newest.co2Ppm, outdoorPpm, limitPpm)
  const holdS = silentAfterS(sensor.intervalS)
  const { overSinceS, overTodayMin } = timeOverLimit(readings, {
    limitPpm,
    nowS,
    dayStartS: input.dayStartS,
    holdS,
  })
  const known = {
    co2Ppm: newest.co2Ppm,
    atS: newest.timeS,
    level,
    overTodayMin,
    unusual: newest.co2Ppm >= UNUSUAL_PPM,
  }
  if (silent) return { ...nothing, ...known, unusual: false }
  if (sensor.suspectSinceS !== null) return { ...nothing, ...known, state: 'sensor suspect' }

  const slopePpmPerMin = recentSlope(readings, nowS)
  const trend = trendOf(slopePpmPerMin)
  const ebb = findEbb(
    readings.filter((reading) => reading.timeS > nowS - EBB_SPAN_S),
    outdoorPpm,
  )
  const falls = ebb !== null && level < 1
  const minutes = trend === 'rising' && slopePpmPerMin ? (limitPpm - newest.co2Ppm) / slopePpmPerMin : null
  const state: RoomState = falls
    ? 'falling'
    : overSinceS !== null
      ? 'over the limit'
      : level >= NEAR_LEVEL
        ? 'near the limit'
        : 'in range'
  return {
    ...known,
    state,
    trend: falls ? 'falling' : trend,
    slopePpmPerMin,
    overSinceS: state === 'over the limit' ? overSinceS : null,
    limitInMin: minutes !== null && minutes > 0 && minutes <= FORECAST_MIN ? minutes : null,
    emptySinceS: falls ? ebb.sinceS : null,
    ebbMarks: falls ? ebb.marksPpm.map((ppm) => glassLevel(ppm, outdoorPpm, limitPpm)) : [],
  }
}

/** How far back a caller must read so that every figure above is right at `nowS`. */
export function readFromS(nowS: number, dayStartS: number): number {
  return Math.min(dayStartS - LIMIT_AVERAGING_S, nowS - EBB_SPAN_S)
}

/** Scores the inference against a generated room's truth: errors, coverage, false accepts, answered evenings. */
import { analyseBuildingDay } from '@/lib/air/analyse-building'
import type { Decay, RoomSpec, Series } from '@/lib/air/types'
import { median } from '@/lib/math/robust'
import { GENERATOR_START_S, type TrueRoom } from './rooms'

/** The part of a record that the run for one day may see. */
export function dayWindow(series: Series, dayStartS: number): Series {
  const keep: number[] = []
  for (let i = 0; i < series.timeS.length; i++) {
    if (series.timeS[i]! >= dayStartS - 7200 && series.timeS[i]! <= dayStartS + 36 * 3600) keep.push(i)
  }
  return {
    timeS: Float64Array.from(keep, (i) => series.timeS[i]!),
    co2Ppm: Float64Array.from(keep, (i) => series.co2Ppm[i]!),
  }
}

export type Scored = {
  decay: Decay
  errorShare: number
  covered: boolean
  falseAccept: boolean
  halfWidth: number
  trueRate: number
  evening: boolean
}

/** Analyses one day (0 = the first) of a generated room. */
export function analyseDay(
  room: TrueRoom,
  day: number,
  spec: Partial<RoomSpec> = {},
  withOutdoor = false,
): Decay[] {
  const dayStartS = GENERATOR_START_S + day * 86400
  const date = new Date(dayStartS * 1000).toISOString().slice(0, 10)
  const rooms = [{ room: { id: 'r', volumeM3: room.volumeM3, ...spec }, series: dayWindow(room, dayStartS) }]
  if (room.neighbour) {
    rooms[0]!.room.neighbour = 'n'
    rooms.push({ room: { id: 'n', volumeM3: 200 }, series: dayWindow(room.neighbour, dayStartS) })
  }
  const outdoor = withOutdoor ? dayWindow(room.outdoor, dayStartS) : undefined
  const result = analyseBuildingDay({
    timeZone: 'UTC',
    date,
    dayStartS,
    dayEndS: dayStartS + 86400,
    rooms,
    outdoor,
  })
  return result[0]!.decays
}

/** Compares one decay with what was true in its window. */
export function scoreDecay(room: TrueRoom, decay: Decay): Scored {
  const from = Math.max(0, Math.round((decay.startS - room.fromS) / 60))
  const to = Math.max(from + 1, Math.round((decay.endS - room.fromS) / 60))
  let sum = 0
  let low = Number.POSITIVE_INFINITY
  let high = 0
  let personMinutes = 0
  for (let m = from; m < to; m++) {
    const rate = room.ratePerHour[m]!
    sum += rate
    low = Math.min(low, rate)
    high = Math.max(high, rate)
    personMinutes += room.persons[m]! > 0 ? 1 : 0
  }
  // demand control: the occupied end counts
  const trueRate = room.kind === 'demand' ? room.ratePerHour[from + 1]! : sum / (to - from)
  const rate = decay.airChangeRatePerHour ?? Number.NaN
  const errorShare = rate / trueRate - 1
  const lowLimit = decay.airChangeRateLowPerHour ?? 0
  const highLimit = decay.airChangeRateHighPerHour ?? Number.POSITIVE_INFINITY
  const bad = personMinutes > 2 || high > 1.25 * low
  const evening = room.evenings.some((e) => Math.abs(decay.startS - e.leaveS) < 2400)
  return {
    decay,
    errorShare,
    covered: trueRate >= lowLimit && trueRate <= highLimit,
    falseAccept: decay.quality === 'accepted' && bad && Math.abs(errorShare) > 0.2,
    halfWidth: Math.sqrt(highLimit / lowLimit) - 1,
    trueRate,
    evening,
  }
}

export type ClassScore = {
  kind: string
  evenings: number
  answered: number
  figures: number
  medianErrorPct: number
  coveragePct: number
  medianHalfWidthPct: number
  accepted: number
  falseAccepts: number
}

/** Sums up the scores of many decays of one class. */
export function summarise(kind: string, evenings: number, scored: readonly Scored[]): ClassScore {
  const given = scored.filter((s) => s.decay.quality !== 'refused' && s.decay.airChangeRatePerHour !== null)
  const covered = given.filter((s) => s.covered).length
  return {
    kind,
    evenings,
    answered: given.filter((s) => s.evening).length,
    figures: given.length,
    medianErrorPct: 100 * median(given.map((s) => Math.abs(s.errorShare))),
    coveragePct: (100 * covered) / Math.max(1, given.length),
    medianHalfWidthPct: 100 * median(given.map((s) => s.halfWidth)),
    accepted: given.filter((s) => s.decay.quality === 'accepted').length,
    falseAccepts: given.filter((s) => s.falseAccept).length,
  }
}

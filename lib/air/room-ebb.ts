import type { LiveReading } from './running-mean'

/** A level that has been falling since people left. */
export type Ebb = {
  /** when the fall began, epoch seconds */
  sinceS: number
  /** where the level stood at the start and every 10 min after, ppm */
  marksPpm: number[]
}

/** All numbers of this file are engineering choices: this is a live hint for a tile, the nightly analysis decides what is a decay. */
const SMOOTHING_S = 300
const LEAST_FALL_S = 8 * 60
const LEAST_FALL_PPM = 60
const LEAST_FALL_SHARE = 0.15
const LEAST_EXCESS_PPM = 40
const LOOK_BACK_S = 20 * 60
const LEAST_RECENT_FALL_SHARE = 0.03
/** With people still in the room the fall bends towards their level: its second half is then far slower than its first. */
const LEAST_STRAIGHTNESS = 0.55
const MARK_EVERY_S = 600

/** Centred mean over five minutes. */
function smooth(readings: readonly LiveReading[]): LiveReading[] {
  let from = 0
  let to = 0
  let sum = 0
  return readings.map((reading) => {
    while (to < readings.length && readings[to]!.timeS <= reading.timeS + SMOOTHING_S / 2) {
      sum += readings[to]!.co2Ppm
      to += 1
    }
    while (readings[from]!.timeS < reading.timeS - SMOOTHING_S / 2) {
      sum -= readings[from]!.co2Ppm
      from += 1
    }
    return { timeS: reading.timeS, co2Ppm: sum / (to - from) }
  })
}

/** Index at which the fall that lasts until now began: the last one near the most recent high that nothing rose from since. */
function fallStart(course: readonly LiveReading[], tolerancePpm: number): number {
  let high = course.length - 1
  for (let i = course.length - 2; i >= 0; i -= 1) {
    if (course[i]!.co2Ppm > course[high]!.co2Ppm) high = i
    else if (course[high]!.co2Ppm - course[i]!.co2Ppm > tolerancePpm) break
  }
  let start = high
  for (let i = high; i < course.length; i += 1) {
    if (course[i]!.co2Ppm >= course[high]!.co2Ppm - tolerancePpm / 2) start = i
  }
  return start
}

const levelAt = (course: readonly LiveReading[], timeS: number) =>
  course.reduce((near, point) =>
    Math.abs(point.timeS - timeS) < Math.abs(near.timeS - timeS) ? point : near,
  ).co2Ppm

/** Does the fall run straight on a log scale, as it does when nobody is left? */
function isStraight(
  course: readonly LiveReading[],
  startS: number,
  endS: number,
  outdoorPpm: number,
): boolean {
  if (endS - startS < LOOK_BACK_S) return true
  const excess = (timeS: number) => Math.max(1, levelAt(course, timeS) - outdoorPpm)
  const middleS = (startS + endS) / 2
  const early = Math.log(excess(startS) / excess(middleS))
  const late = Math.log(excess(middleS) / excess(endS))
  return late >= LEAST_STRAIGHTNESS * early
}

/**
 * Has the level been falling since people left? Null while it rises or stands, when the fall is small or has reached outdoor air, or
 * when it bends as it does with people still in the room. `readings` rise in time; the last three hours are enough.
 */
export function findEbb(readings: readonly LiveReading[], outdoorPpm: number): Ebb | null {
  if (readings.length < 3) return null
  const course = smooth(readings)
  const now = course[course.length - 1]!
  const excess = now.co2Ppm - outdoorPpm
  if (excess < LEAST_EXCESS_PPM) return null
  const start = course[fallStart(course, Math.max(15, 0.03 * excess))]!
  const fallPpm = start.co2Ppm - now.co2Ppm
  if (now.timeS - start.timeS < LEAST_FALL_S) return null
  if (fallPpm < Math.max(LEAST_FALL_PPM, LEAST_FALL_SHARE * (start.co2Ppm - outdoorPpm))) return null
  const recentFall = levelAt(course, Math.max(start.timeS, now.timeS - LOOK_BACK_S)) - now.co2Ppm
  if (recentFall < LEAST_RECENT_FALL_SHARE * excess) return null
  if (!isStraight(course, start.timeS, now.timeS, outdoorPpm)) return null
  const marksPpm: number[] = []
  for (let t = start.timeS; t < now.timeS; t += MARK_EVERY_S) marksPpm.push(levelAt(course, t))
  return { sinceS: start.timeS, marksPpm }
}

/** One reading of a live sensor: epoch seconds and ppm. */
export type LiveReading = { readonly timeS: number; readonly co2Ppm: number }

/** Averaging time of a limit (s): the 15 min mean that product limits speak of. */
export const LIMIT_AVERAGING_S = 900
const STEP_S = 60

/** A mean counts only where readings cover at least half of its window (engineering choice). */
const LEAST_COVERAGE = 0.5

type Integral = { timeS: number[]; sumPpmS: number[]; coveredS: number[] }

/** Running integral of the record, each reading held until the next but no longer than `holdS`: beyond that is a gap. */
function integrate(readings: readonly LiveReading[], holdS: number, endS: number): Integral {
  const timeS: number[] = []
  const sumPpmS: number[] = []
  const coveredS: number[] = []
  let sum = 0
  let covered = 0
  const mark = (at: number) => {
    timeS.push(at)
    sumPpmS.push(sum)
    coveredS.push(covered)
  }
  readings.forEach((reading, i) => {
    mark(reading.timeS)
    const next = readings[i + 1]?.timeS ?? endS
    const held = Math.max(0, Math.min(next - reading.timeS, holdS))
    sum += held * reading.co2Ppm
    covered += held
    mark(reading.timeS + held)
  })
  return { timeS, sumPpmS, coveredS }
}

/** Reads an integral at rising instants; `cursor` moves forward only. */
function reader({ timeS, sumPpmS, coveredS }: Integral) {
  let cursor = 0
  return (at: number) => {
    while (cursor + 1 < timeS.length && timeS[cursor + 1]! <= at) cursor += 1
    const t0 = timeS[cursor] ?? 0
    if (timeS.length === 0 || at <= t0) return { sum: sumPpmS[cursor] ?? 0, covered: coveredS[cursor] ?? 0 }
    const t1 = timeS[cursor + 1]
    if (t1 === undefined || t1 === t0) return { sum: sumPpmS[cursor]!, covered: coveredS[cursor]! }
    const share = (at - t0) / (t1 - t0)
    return {
      sum: sumPpmS[cursor]! + share * (sumPpmS[cursor + 1]! - sumPpmS[cursor]!),
      covered: coveredS[cursor]! + share * (coveredS[cursor + 1]! - coveredS[cursor]!),
    }
  }
}

export type TimeOver = {
  /** start of the run above the limit that lasts until now; null when the mean is not above it now */
  overSinceS: number | null
  /** minutes above the limit since `dayStartS` */
  overTodayMin: number
  /** the 15 min mean now, ppm; null when readings cover less than half of it */
  meanPpm: number | null
}

/**
 * How long the 15 min running mean has stood above a limit, minute by minute. `readings` rise in time; a reading holds until the next,
 * at most `holdS` (so a gap is neither over nor under).
 */
export function timeOverLimit(
  readings: readonly LiveReading[],
  input: { limitPpm: number; nowS: number; dayStartS: number; holdS: number },
): TimeOver {
  const integral = integrate(readings, input.holdS, input.nowS)
  const ahead = reader(integral)
  const behind = reader(integral)
  const firstS = readings[0]?.timeS ?? input.nowS
  const steps = Math.max(0, Math.floor((input.nowS - firstS) / STEP_S))
  let overSinceS: number | null = null
  let overTodayMin = 0
  let meanPpm: number | null = null
  for (let step = steps; step >= 0; step -= 1) {
    const at = input.nowS - step * STEP_S
    const end = ahead(at)
    const start = behind(at - LIMIT_AVERAGING_S)
    const covered = end.covered - start.covered
    meanPpm = covered >= LEAST_COVERAGE * LIMIT_AVERAGING_S ? (end.sum - start.sum) / covered : null
    const over = meanPpm !== null && meanPpm > input.limitPpm
    overSinceS = over ? (overSinceS ?? at) : null
    if (over && at > input.dayStartS) overTodayMin += STEP_S / 60
  }
  return { overSinceS, overTodayMin, meanPpm }
}

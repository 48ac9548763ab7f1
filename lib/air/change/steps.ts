import { binomialUpperTail } from '@/lib/math/binomial'
import { median } from '@/lib/math/robust'
import { studentTQuantile } from '@/lib/math/student-t'
import { addDays } from '@/lib/time'
import { segment } from './segment'
import { type DayNoise, dayNoise, type RateDay, withoutOddDays, withoutWeekendPattern } from './series'

/** A lasting step of a room's rate within one mode. */
export type RateStep = {
  /** first night of the new rate, with the nights between which it may lie (95 %) */
  onNight: string
  earliestNight: string
  latestNight: string
  /** new rate / old rate with its 95 % interval */
  ratio: number
  ratioLow: number
  ratioHigh: number
  beforePerHour: number
  afterPerHour: number
  /** days that each side rests on */
  daysBefore: number
  daysAfter: number
  /** one plain sentence */
  sentence: string
}

export type StepOptions = {
  /** least days on each side; default 4 */
  leastDays?: number
  /** steps smaller than this on ln(rate) are not reported; default 0.12 (12 %) */
  leastStepLn?: number
}

/** Penalty per change in units of ln n, and the standard errors a step must measure: set so that a year without change stays quiet. */
const PENALTY_PER_LN_N = 3
const CONFIRM_SD = 3.3
/** Share of the days on each side that must lie nearer to their own side's level. */
const CONFIRM_SHARE = 0.8
/** Largest expected number of such stretches that a mixture of two kinds of day would show by chance. */
const CONFIRM_CHANCE = 0.02
/** Days on each side that speak for the size of a step; older ones may belong to another season. */
const SIDE_DAYS = 60
/** 95 % half-width of a change's date is this times variance / step² (Bai 1997, symmetric quantile, from memory). */
const BAI_95 = 11

type Side = { from: number; to: number; level: number }
type Measured = {
  at: number
  before: Side
  after: Side
  stepLn: number
  standardError: number
  sound: boolean
}

function sideOf(values: readonly number[], from: number, to: number): Side {
  return { from, to, level: median(values.slice(from, to)) }
}

/** Days of `side` that lie nearer to the level of `other` than to their own. */
const strayDays = (values: readonly number[], side: Side, other: Side) =>
  values.slice(side.from, side.to).filter((y) => Math.abs(y - other.level) < Math.abs(y - side.level)).length

/**
 * Whether one side is more than a lucky run of days that come now and then anyway (a door, a fan left off): the run's binomial chance
 * at the share of such days in the rest of the series, times the places where a run could start.
 */
function isBeyondMixture(values: readonly number[], side: Side, other: Side): boolean {
  const days = side.to - side.from
  const rest = [...values.slice(0, side.from), ...values.slice(side.to)]
  const like = rest.filter((y) => Math.abs(y - side.level) < Math.abs(y - other.level)).length
  const share = (like + 0.5) / (rest.length + 1)
  return (
    binomialUpperTail(days - strayDays(values, side, other), days, share) * values.length < CONFIRM_CHANCE
  )
}

const isSeparate = (values: readonly number[], side: Side, other: Side) =>
  strayDays(values, side, other) <= (1 - CONFIRM_SHARE) * (side.to - side.from)

/** Size and standing of the change at `at` between its neighbouring changes. */
function measure(
  values: readonly number[],
  noise: DayNoise,
  bounds: [number, number, number],
  least: number,
): Measured {
  const [start, at, end] = bounds
  const before = sideOf(values, Math.max(start, at - SIDE_DAYS), at)
  const after = sideOf(values, at, Math.min(end, at + SIDE_DAYS))
  const stepLn = after.level - before.level
  const perDay = 1 / (before.to - before.from) + 1 / (after.to - after.from)
  // medians are used for the level: their variance is π/2 that of a mean
  const standardError = Math.sqrt((Math.PI / 2) * noise.longRunVariance * perDay)
  const sound =
    Math.abs(stepLn) >= least &&
    Math.abs(stepLn) >= CONFIRM_SD * standardError &&
    isSeparate(values, before, after) &&
    isSeparate(values, after, before) &&
    (isBeyondMixture(values, before, after) || isBeyondMixture(values, after, before))
  return { at, before, after, stepLn, standardError, sound }
}

/** Drops the weakest unconfirmed change and measures again, until all that are left are confirmed. */
function confirm(
  values: readonly number[],
  noise: DayNoise,
  candidates: readonly number[],
  least: number,
): Measured[] {
  let changes = [...candidates]
  for (;;) {
    const measured = changes.map((at, i) =>
      measure(values, noise, [changes[i - 1] ?? 0, at, changes[i + 1] ?? values.length], least),
    )
    const weak = measured.filter((one) => !one.sound)
    if (weak.length === 0) return measured
    const weakest = weak.reduce((a, b) =>
      Math.abs(a.stepLn) / a.standardError <= Math.abs(b.stepLn) / b.standardError ? a : b,
    )
    changes = changes.filter((at) => at !== weakest.at)
  }
}

function describe(days: readonly RateDay[], noise: DayNoise, found: Measured): RateStep {
  const { at, before, after, stepLn, standardError } = found
  const daysBefore = before.to - before.from
  const daysAfter = after.to - after.from
  const independent = ((daysBefore + daysAfter) * (1 - noise.correlation)) / (1 + noise.correlation)
  const half = studentTQuantile(0.975, Math.max(2, independent - 2)) * standardError
  const dateHalf = Math.ceil((BAI_95 * noise.longRunVariance) / stepLn ** 2) + 1
  const nightAt = (index: number) => days[Math.min(days.length - 1, Math.max(0, index))]!.night
  const beforePerHour = Math.exp(median(days.slice(before.from, before.to).map((day) => day.lnRate)))
  const ratio = Math.exp(stepLn)
  const percent = Math.round(Math.abs(ratio - 1) * 100)
  const onNight = nightAt(at)
  return {
    onNight,
    // a change may lie in a stretch without decays: then it began the day after the last night of the old rate
    earliestNight: addDays(nightAt(Math.max(at - 1, at - dateHalf)), dateHalf > 1 ? 1 - dateHalf : 1),
    latestNight: nightAt(at + dateHalf - 1),
    ratio,
    ratioLow: Math.exp(stepLn - half),
    ratioHigh: Math.exp(stepLn + half),
    beforePerHour,
    afterPerHour: beforePerHour * ratio,
    daysBefore,
    daysAfter,
    sentence: `The air-change rate ${ratio < 1 ? 'fell' : 'rose'} by ${percent} % around ${onNight} and has stayed there for ${daysAfter} measured days.`,
  }
}

/**
 * Lasting steps of one room's rate within ONE mode, oldest first. On ln(rate), with the weekend pattern and single odd days taken out:
 * penalised segmentation, then each candidate is confirmed by its size against the correlated day-to-day noise and by most days of
 * either side lying with their side. Set for at most one false alarm in a room-year.
 * @param days one entry per local day, in order of date
 * @source segmentation after Killick et al. 2012, date interval after Bai 1997 (both from memory); thresholds set by simulation in tests
 */
export function findRateSteps(days: readonly RateDay[], options: StepOptions = {}): RateStep[] {
  const leastDays = options.leastDays ?? 4
  if (days.length < 2 * leastDays) return []
  const values = withoutWeekendPattern(days)
  const calmed = withoutOddDays(values)
  const noise = dayNoise(calmed)
  const penalty = PENALTY_PER_LN_N * Math.log(days.length)
  const candidates = segment(calmed, noise.longRunVariance, penalty, leastDays)
  return confirm(values, noise, candidates, options.leastStepLn ?? 0.12).map((found) =>
    describe(days, noise, found),
  )
}

/** First night of the present rate, or null when the series holds no step. */
export function lastChangeNight(steps: readonly RateStep[]): string | null {
  return steps.at(-1)?.onNight ?? null
}

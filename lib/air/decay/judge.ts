/** Gates: which readings of a decay may be given as a figure, with what doubt, or as a bound only. */
import { GATES, PLAUSIBLE_FLOOR_PPM, REFERENCE } from '@/lib/air/constants'
import type { Background, Check, EstimateKind, Quality, Reason } from '@/lib/air/types'
import { median } from '@/lib/math/robust'
import { type CleanRecord, type Interval, indexAt } from './clean'
import type { Reading } from './run'

export type Verdict = { kind: EstimateKind; quality: Quality; reasons: Reason[]; checks: Check[] }

export type Suspicion = { doubts: Reason[]; refusals: Reason[]; floorsAgree: boolean }

const overlaps = (interval: Interval, fromS: number, toS: number) =>
  interval.fromS < toS && interval.toS > fromS

/** The longest silence inside a window as a share of it; on-change sensors may be silent. */
export function gapShare(record: CleanRecord, fromS: number, toS: number): number {
  if (record.onChange) return 0
  let longest = 0
  let last = fromS
  for (let i = indexAt(record.timeS, fromS); i < record.timeS.length && record.timeS[i]! <= toS; i++) {
    longest = Math.max(longest, record.timeS[i]! - last)
    last = record.timeS[i]!
  }
  longest = Math.max(longest, toS - last)
  return longest <= 2.5 * record.stepS ? 0 : longest / Math.max(1, toS - fromS)
}

const halfWidth = (reading: Reading) =>
  Math.sqrt(reading.estimate.highPerHour / reading.estimate.lowPerHour) - 1

function buildChecks(reading: Reading, record: CleanRecord, background: Background, gap: number): Check[] {
  const { piece, estimate } = reading
  const x = estimate.ratePerHour * (piece.toH - piece.fromH)
  const startAsked = Math.max(
    GATES.startExcessPpm,
    4 * background.standardUncertaintyPpm,
    GATES.startExcessSigmas * median(reading.data.sdPpm),
  )
  const minutes = (piece.toH - piece.fromH) * 60
  const points = pointsInside(record, reading.fromS, reading.toS)
  const check = (name: string, found: string, asked: string, passes: boolean) => ({
    name,
    found,
    asked,
    passes,
  })
  return [
    check(
      'Excess at the start',
      `${piece.startExcessPpm.toFixed(0)} ppm`,
      `at least ${startAsked.toFixed(0)} ppm`,
      piece.startExcessPpm >= startAsked,
    ),
    check(
      'Length',
      `${minutes.toFixed(0)} min`,
      `at least ${GATES.durationS / 60} min`,
      minutes * 60 >= GATES.durationS,
    ),
    check(
      'Fall',
      `${x.toFixed(2)} time constants`,
      `at least ${GATES.timeConstants}`,
      x >= GATES.timeConstants,
    ),
    check('Readings', `${points}`, `at least ${GATES.points}`, points >= GATES.points),
    check(
      'Longest gap',
      `${(gap * 100).toFixed(0)} % of the window`,
      `at most ${GATES.gapShare * 100} %`,
      gap <= GATES.gapShare,
    ),
    check(
      'Interval',
      `± ${(halfWidth(reading) * 100).toFixed(0)} %`,
      `at most ± ${GATES.acceptedHalfWidth * 100} %`,
      halfWidth(reading) <= GATES.acceptedHalfWidth,
    ),
    check(
      'Background',
      `${background.ppm.toFixed(0)} ± ${(1.96 * background.standardUncertaintyPpm).toFixed(0)} ppm`,
      `${PLAUSIBLE_FLOOR_PPM.low} to ${PLAUSIBLE_FLOOR_PPM.high} ppm`,
      background.ppm >= PLAUSIBLE_FLOOR_PPM.low && background.ppm <= PLAUSIBLE_FLOOR_PPM.high,
    ),
  ]
}

/** Number of readings in a window. */
export function pointsInside(record: CleanRecord, fromS: number, toS: number): number {
  return indexAt(record.timeS, toS + 1e-3) - indexAt(record.timeS, fromS)
}

/** True when the rate is so fast or so slow that only a bound is honest. */
export function boundKind(reading: Reading, record: CleanRecord): EstimateKind {
  const { estimate, piece } = reading
  if (reading.demand) return 'range'
  const wide = halfWidth(reading) > GATES.doubtfulHalfWidth
  const falls = (record.stepS / 3600) * estimate.ratePerHour
  const telling = pointsInside(record, reading.fromS, reading.toS)
  const long = estimate.ratePerHour * (piece.toH - piece.fromH) > REFERENCE.longEnough
  const asked = long ? GATES.tellingPoints : GATES.tellingPointsShort
  if (falls > 0.9 || (telling < asked && falls > 0.25 && !record.onChange) || (wide && falls > 0.5))
    return 'at-least'
  if (wide && estimate.ratePerHour < 0.35 && piece.toH - piece.fromH > 1) return 'at-most'
  return 'fit'
}

/** Judges one reading. `suspicion` holds what is known from outside the fit: people, neighbours, demand control. */
export function judgeReading(
  reading: Reading,
  record: CleanRecord,
  background: Background,
  suspicion: Suspicion,
): Verdict {
  const gap = gapShare(record, reading.fromS, reading.toS)
  const checks = buildChecks(reading, record, background, gap)
  const kind = boundKind(reading, record)
  const refusals: Reason[] = [...suspicion.refusals]
  const doubts: Reason[] = [...suspicion.doubts]
  const [start, length, fall, points, gapCheck, width, floor] = checks.map((entry) => entry.passes)
  const rate = reading.estimate.ratePerHour
  if (!start)
    (reading.piece.startExcessPpm < 0.55 * GATES.startExcessPpm ? refusals : doubts).push('start-too-low')
  if (kind === 'range') doubts.push('demand-controlled')
  else if (kind === 'fit') {
    if (!length || !fall)
      (halfWidth(reading) > GATES.doubtfulHalfWidth / 2 ? refusals : doubts).push('too-short')
    if (!points)
      (pointsInside(record, reading.fromS, reading.toS) < 4 ? refusals : doubts).push('too-few-points')
    if (!width && halfWidth(reading) > GATES.doubtfulHalfWidth) refusals.push('not-identifiable')
    else if (!width)
      doubts.push(
        reading.estimate.parts.background > reading.estimate.parts.regression
          ? 'background-unknown'
          : 'not-identifiable',
      )
  } else doubts.push(kind === 'at-least' ? 'too-fast' : 'too-slow')
  if (reading.estimate.misfit > GATES.misfit) doubts.push('rate-changing')
  if (!gapCheck) (gap > 0.6 ? refusals : doubts).push('gap')
  // a false zero cancels where the room's own resting level is the background, that night's or others', and does not where it is not
  const own = background.origin === 'own record' || background.origin === 'quiet nights'
  const cancels = own && (suspicion.floorsAgree || background.ppm < PLAUSIBLE_FLOOR_PPM.low)
  if (!floor && !cancels) doubts.push('sensor-suspect')
  if (record.stuck.some((cut) => overlaps(cut, reading.fromS, reading.toS))) doubts.push('sensor-suspect')
  if (record.clockClashes.some((t) => t >= reading.fromS - 3600 && t <= reading.toS)) doubts.push('clock')
  if (record.saturated.some((cut) => overlaps(cut, reading.fromS + 1, reading.toS))) doubts.push('saturated')
  if (!(rate > 0)) refusals.push('too-slow')
  const reasons = [...new Set([...refusals, ...doubts])]
  const quality: Quality = refusals.length > 0 ? 'refused' : doubts.length > 0 ? 'doubtful' : 'accepted'
  return { kind, quality, reasons, checks }
}

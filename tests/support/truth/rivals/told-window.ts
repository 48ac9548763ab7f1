import type { Answer } from '../answer'
import type { TruthBuilding, TruthRoom } from '../building'
import { isoZ, localDate } from '../calendar'
import { type Evening, eveningsOf } from '../judge'
import type { Reading } from '../sensor'
import { quantile } from '../summary'
import { lagOne, studentQuantile975 } from './statistics'

type Fit = { rate: number; standardError: number; background: number }

/** Best start excess and background for a rate by linear least squares, with the sum of squares that is left. */
function given(rows: readonly Reading[], rate: number, fixed: number | null) {
  const t0 = rows[0]!.clockS
  let see = 0
  let se = 0
  let sey = 0
  let sy = 0
  for (const row of rows) {
    const e = Math.exp((-rate * (row.clockS - t0)) / 3600)
    see += e * e
    se += e
    sey += e * row.ppm
    sy += row.ppm
  }
  const n = rows.length
  const background = fixed ?? (sy * see - se * sey) / (n * see - se * se)
  const start = (sey - background * se) / see
  const residuals = rows.map((r) => r.ppm - background - start * Math.exp((-rate * (r.clockS - t0)) / 3600))
  return { start, background, residuals, left: residuals.reduce((sum, r) => sum + r * r, 0) }
}

/** Nonlinear least squares of B + E exp(−A t) by golden-section search on ln A; interval from an effective number of readings. */
function fit(rows: readonly Reading[], fixed: number | null): Fit | null {
  const cost = (ln: number) => given(rows, Math.exp(ln), fixed).left
  const golden = (Math.sqrt(5) - 1) / 2
  let low = Math.log(0.01)
  let high = Math.log(30)
  for (let i = 0; i < 60; i++) {
    const a = high - golden * (high - low)
    const b = low + golden * (high - low)
    if (cost(a) < cost(b)) high = b
    else low = a
  }
  const rate = Math.exp((low + high) / 2)
  const best = given(rows, rate, fixed)
  const phi = lagOne(best.residuals)
  const effective = (rows.length * (1 - phi)) / (1 + phi)
  const parameters = fixed === null ? 3 : 2
  if (effective <= parameters + 1) return null
  // curvature of the profile of the sum of squares gives the standard error of ln A
  const h = 0.02
  const curvature = (cost(Math.log(rate) + h) - 2 * best.left + cost(Math.log(rate) - h)) / (h * h)
  if (!(curvature > 0)) return null
  const variance = (2 * best.left) / (effective - parameters) / curvature
  return { rate, standardError: Math.sqrt(variance * (rows.length / effective > 1 ? 1 : 1)), background: best.background }
}

function backgroundOf(building: TruthBuilding, room: TruthRoom, evening: Evening): number {
  const { spell } = evening
  const settledS = spell.fromS + (5 / spell.totalPerHour) * 3600
  const own = room.readings.filter((r) => r.trueS > settledS && r.trueS < spell.steadyToS).map((r) => r.ppm)
  if (own.length >= 5) return quantile(own, 0.5)
  const outdoor = building.outdoor?.filter((r) => r.trueS > spell.fromS - 3600 && r.trueS < spell.toS).map((r) => r.ppm)
  return outdoor && outdoor.length > 0 ? outdoor.reduce((a, b) => a + b, 0) / outdoor.length : 425
}

function oneEvening(building: TruthBuilding, evening: Evening): Answer | null {
  const { room, spell } = evening
  const fromS = spell.fromS + Math.max(240, 4 * room.draft.sensor.lagS)
  const wholeX = ((spell.steadyToS - fromS) / 3600) * spell.totalPerHour
  const toS = Math.min(spell.steadyToS, fromS + (3.5 / spell.totalPerHour) * 3600)
  const rows = room.readings.filter((r) => r.trueS >= fromS && r.trueS < toS && r.ppm < room.draft.sensor.rangeMaxPpm)
  if (rows.length < 6) return null
  const settled = wholeX >= 5
  const found = fit(rows, wholeX >= 3 && !settled ? null : backgroundOf(building, room, evening))
  if (!found) return null
  const half = studentQuantile975(rows.length - 3) * found.standardError
  return {
    room: room.id,
    night: localDate(building.zone, rows[0]!.clockS),
    start: isoZ(rows[0]!.clockS),
    end: isoZ(rows.at(-1)!.clockS),
    kind: 'fit',
    ach: found.rate,
    ach_low: found.rate * Math.exp(-half),
    ach_high: found.rate * Math.exp(half),
    background_ppm: found.background,
    quality: 'accepted',
    reasons: [],
  }
}

/**
 * The fit that is told the truth about the window: when the last person left, when the rate changed or somebody came, and how long
 * three and a half time constants are. What remains is the sensor and the background. Answers each evening that has a real decay.
 */
export function toldWindow(building: TruthBuilding): Answer[] {
  return building.rooms.flatMap((room) =>
    eveningsOf(building, room).flatMap((evening) => (evening.answerable ? (oneEvening(building, evening) ?? []) : [])),
  )
}

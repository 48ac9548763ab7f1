import { type Answer, REASONS_THAT_INFORM, secondsOf } from './answer'
import type { TruthBuilding, TruthRoom } from './building'
import { localDate } from './calendar'
import { describe, type EmptySpell, type Interval } from './record'

/** An accepted figure is grossly wrong when it is further off than this. */
export const GROSS = 0.2
/** The highest rate in force over the lowest: above this two rates are mixed (slow wander stays well below). */
const MIXED_RATIO = 1.35

export type Verdict = {
  room: TruthRoom
  answer: Answer
  truth: Interval
  /** the evening whose first steady part this answer speaks of */
  evening: Evening | null
  /** (figure − truth) / truth; null where no single figure is given */
  error: number | null
  covered: boolean | null
  halfWidth: number | null
  people: boolean
  mixed: boolean
  falseAccept: boolean
  gross: boolean
  noDecay: boolean
  nightRight: boolean
  /** for bounds and ranges: does what is said hold? */
  boundHolds: boolean | null
  /** the outdoor range given, if any, holds the outdoor rate */
  outdoorHolds: boolean | null
}

export type Evening = {
  room: TruthRoom
  date: string
  spell: EmptySpell
  /** a careful analyst would expect a figure: enough start, 0.7 time constants of one rate, 8 readings */
  answerable: boolean
}

export type Judgement = { verdicts: Verdict[]; evenings: Evening[] }

function readingsIn(room: TruthRoom, fromS: number, toS: number): number {
  let count = 0
  for (const reading of room.readings) if (reading.trueS >= fromS && reading.trueS < toS) count++
  return count
}

/** A stretch in which no record can be trusted: nothing arrived, or the value was stuck. */
function damagedBefore(room: TruthRoom, fromS: number, toS: number): boolean {
  const { missing, stuck, clock } = room.draft.flaws
  const spans = [...missing, ...stuck, ...clock.map((c) => ({ fromS: c.fromS, toS: c.fromS + 1 }))]
  return spans.some((s) => s.fromS < toS && s.toS > fromS)
}

/** The first stretch without people after the last occupant of each day. */
export function eveningsOf(building: TruthBuilding, room: TruthRoom): Evening[] {
  const evenings: Evening[] = []
  for (const [d, date] of building.dates.entries()) {
    const leaveS = room.draft.lastLeaveS[d]!
    const spell = room.spells.find((s) => Math.abs(s.fromS - leaveS) <= 150)
    if (!spell) continue
    const neededS = Math.max(1200, (0.7 / spell.totalPerHour) * 3600)
    const strong = spell.startExcessPpm >= Math.max(120, 8 * room.draft.sensor.whitePpm)
    const long = spell.steadyToS - spell.fromS >= neededS * 0.98
    const sound = !damagedBefore(room, spell.fromS, spell.fromS + neededS * 0.95)
    const dense = readingsIn(room, spell.fromS, Math.min(spell.steadyToS, spell.fromS + 3 * neededS)) >= 8
    evenings.push({ room, date, spell, answerable: strong && long && sound && dense })
  }
  return evenings
}

/** True time of what the sensor's clock said. */
function trueTime(room: TruthRoom, clockS: number): number {
  if (room.draft.flaws.clock.length === 0) return clockS
  let nearest = room.readings[0]!
  for (const reading of room.readings)
    if (Math.abs(reading.clockS - clockS) < Math.abs(nearest.clockS - clockS)) nearest = reading
  return nearest.trueS
}

/** Air from a neighbour that nobody measures, and the answer says so: outdoor and total cannot be told apart. */
function unknowable(room: TruthRoom, answer: Answer): boolean {
  if (!room.draft.neighbour || room.draft.neighbour.measured) return false
  return answer.outdoor_ach_low != null || answer.reasons.some((r) => REASONS_THAT_INFORM.includes(r))
}

/** The rate that `ach` names: total replacement by lower-CO2 air where the room draws on a known neighbour or on return air. */
function referenceRate(room: TruthRoom, truth: Interval, answer: Answer): number {
  if (!room.draft.neighbour) return truth.outdoorPerHour
  const saysSo = answer.outdoor_ach_low != null || answer.reasons.some((r) => REASONS_THAT_INFORM.includes(r))
  if (!saysSo) return truth.outdoorPerHour
  if (!unknowable(room, answer)) return truth.totalPerHour
  // any figure between the two is a fair dilution rate; whether an interval holds it is then no question
  return Math.min(truth.totalPerHour, Math.max(truth.outdoorPerHour, answer.ach ?? truth.totalPerHour))
}

/**
 * Does what is said hold? A bound against the rate over its window; a range, which speaks for the occupied end, against the rates in force
 * in the window's first quarter of an hour.
 */
function boundHolds(answer: Answer, first: Interval, rate: number): boolean | null {
  if (answer.kind === 'at-least') return answer.ach_low !== null && rate >= answer.ach_low
  if (answer.kind === 'at-most') return answer.ach_high !== null && rate <= answer.ach_high
  if (answer.kind !== 'range' || answer.ach_low === null || answer.ach_high === null) return null
  return first.highestPerHour >= answer.ach_low && first.lowestPerHour <= answer.ach_high
}

function overlapShare(startS: number, endS: number, fromS: number, toS: number): number {
  return Math.max(0, Math.min(endS, toS) - Math.max(startS, fromS)) / Math.max(1, endS - startS)
}

function judgeOne(building: TruthBuilding, room: TruthRoom, evenings: Evening[], answer: Answer): Verdict {
  const startS = trueTime(room, secondsOf(answer.start))
  const endS = Math.max(startS + 60, trueTime(room, secondsOf(answer.end)))
  const truth = describe(room.truth, startS, endS)
  const rate = referenceRate(room, truth, answer)
  const figured = answer.kind === 'fit' && answer.ach !== null && answer.quality !== 'refused'
  const error = figured ? (answer.ach! - rate) / rate : null
  const ends = figured && answer.ach_low !== null && answer.ach_high !== null
  const people = truth.peopleMinutes > 2
  const mixed = truth.highestPerHour / truth.lowestPerHour > MIXED_RATIO
  const gross = answer.quality === 'accepted' && error !== null && Math.abs(error) > GROSS
  const outdoorGiven = answer.outdoor_ach_low != null && answer.outdoor_ach_high != null
  return {
    room,
    answer,
    truth,
    evening:
      evenings.find((e) => overlapShare(startS, endS, e.spell.fromS - 300, e.spell.steadyToS + 300) > 0.5) ??
      null,
    error,
    covered: ends && !unknowable(room, answer) ? rate >= answer.ach_low! && rate <= answer.ach_high! : null,
    halfWidth: ends ? (answer.ach_high! - answer.ach_low!) / 2 / answer.ach! : null,
    people,
    mixed,
    falseAccept: gross && (people || mixed),
    gross,
    noDecay:
      answer.quality === 'accepted' &&
      (truth.peopleMinutes * 60 > (endS - startS) / 2 || truth.startExcessPpm < 50),
    nightRight: answer.night === localDate(building.zone, secondsOf(answer.start)),
    boundHolds:
      answer.quality === 'refused'
        ? null
        : boundHolds(answer, describe(room.truth, startS, startS + 900), rate),
    outdoorHolds: outdoorGiven
      ? truth.outdoorPerHour >= answer.outdoor_ach_low! && truth.outdoorPerHour <= answer.outdoor_ach_high!
      : null,
  }
}

/** Judges every answer about a building against what really happened inside the interval that the answer itself names. */
export function judge(building: TruthBuilding, answers: readonly Answer[]): Judgement {
  const byId = new Map(building.rooms.map((room) => [room.id, room]))
  const evenings = new Map(building.rooms.map((room) => [room.id, eveningsOf(building, room)]))
  const verdicts = answers.flatMap((answer) => {
    const room = byId.get(answer.room)
    return room ? [judgeOne(building, room, evenings.get(room.id)!, answer)] : []
  })
  return { verdicts, evenings: [...evenings.values()].flat() }
}

/** The part of a judgement that is about rooms of one class. */
export function ofClass(judgement: Judgement, className: string): Judgement {
  return {
    verdicts: judgement.verdicts.filter((v) => v.room.className === className),
    evenings: judgement.evenings.filter((e) => e.room.className === className),
  }
}

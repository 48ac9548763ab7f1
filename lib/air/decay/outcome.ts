/** Puts a reading, its verdict and its mode together into the decay that everyone sees. */
import { PEOPLE } from '@/lib/air/constants'
import type { Background, Decay, Reason, RoomSpec } from '@/lib/air/types'
import { meanAgeMinutes } from '@/lib/units'
import type { CleanRecord } from './clean'
import { explainDecay } from './explain'
import type { Fall } from './falls'
import { judgeReading, pointsInside, type Suspicion } from './judge'
import type { Moded, SupplyStop } from './modes'
import type { FallReading } from './read-fall'
import type { Reading } from './run'

type Day = { date: string; dayStartS: number; dayEndS: number }

const NOTHING = {
  airChangeRatePerHour: null,
  airChangeRateLowPerHour: null,
  airChangeRateHighPerHour: null,
  outdoorRateLowPerHour: null,
  outdoorRateHighPerHour: null,
  meanAgeMin: null,
  mode: 'unknown' as const,
  modeFrom: null,
  rateChangeAtS: null,
  rateChangeLowS: null,
  rateChangeHighS: null,
  lagOneCorrelation: null,
  effectivePoints: null,
  residualSdPpm: null,
  uncertaintyParts: null,
}

export type Refused = {
  day: Day
  room: RoomSpec
  fall: Fall
  reading: FallReading | null
  background: Background
  record: CleanRecord
}

function refusalReasons({ fall, reading, background, record }: Refused): Reason[] {
  const reasons: Reason[] = []
  if (fall.peakPpm - background.ppm < 90) reasons.push('start-too-low')
  if (record.stuck.some((cut) => cut.fromS < fall.toS && cut.toS > fall.fromS)) reasons.push('sensor-suspect')
  if (reading === null) reasons.push('too-few-points')
  else if (reading.peopleInside) reasons.push('people-present')
  else reasons.push('too-short')
  return reasons
}

/** A fall that yields no rate at all, with the reasons. */
export function refusedDecay(refused: Refused): Decay {
  const { day, room, fall, background, record } = refused
  const reasons = refusalReasons(refused)
  const decay = {
    ...NOTHING,
    roomId: room.id,
    night: day.date,
    startS: fall.fromS,
    endS: fall.toS,
    kind: 'fit' as const,
    background,
    startPpm: fall.peakPpm,
    endPpm: fall.troughPpm,
    quality: 'refused' as const,
    reasons,
    lastPersonLeftS: null,
    points: pointsInside(record, fall.fromS, fall.toS),
    checks: [],
  }
  return { ...decay, sentence: explainDecay(decay) }
}

export type Outcome = {
  day: Day
  room: RoomSpec
  entry: Reading
  reading: FallReading
  background: Background
  record: CleanRecord
  mode: Moded
  /** instants at which the rooms of this air handler slowed together */
  stops: readonly SupplyStop[]
  /** probability that somebody was inside */
  people: number
  /** other decays of this room show demand control */
  demandRoom: boolean
  /** one of two rates that differ mildly, with no fellow to confirm the step */
  mild: boolean
  /** a small decay at a rate that no other decay of the room shows */
  lonely: boolean
  /** see RoomRecord */
  floorsAgree: boolean
  /** slower than another decay of the room in the same mode, see reference.ts */
  contradicted: boolean
  /** too short to stand alone, with no other decay of the room to compare */
  unreferenced: boolean
}

/** Spread of a neighbour's share up to which the total rate is accepted. */
const SURE_SHARE = 0.25

function suspicionOf(outcome: Outcome): Suspicion {
  const { room, people, entry, demandRoom, floorsAgree, lonely, mild } = outcome
  const doubts: Reason[] = []
  const refusals: Reason[] = []
  if (room.air === 'recirculating') doubts.push('recirculation-possible')
  if (mild && !entry.coupled) doubts.push('rate-changing')
  if (lonely) doubts.push('start-too-low')
  if (demandRoom && !entry.demand) doubts.push('demand-controlled')
  const unsure = entry.coupled ? entry.coupled.shareSd > SURE_SHARE : room.neighbour !== undefined
  if (unsure) doubts.push('neighbour-coupled')
  if (people > PEOPLE.refused || outcome.contradicted) refusals.push('people-present')
  else if (people > PEOPLE.doubtful || outcome.unreferenced) doubts.push('people-present')
  return { doubts, refusals, floorsAgree }
}

type Change = { atS: number; lowS: number; highS: number }

/** The change of rate, at the instant that fellows on the same air handler agree on where they saw it too. */
function sharedInstant(change: Change | null, stops: readonly SupplyStop[]): Change | null {
  if (!change) return null
  const shared = stops.find(
    (stop) => stop.rooms > 1 && stop.atS >= change.lowS - 300 && stop.atS <= change.highS + 300,
  )
  return shared ?? change
}

/** The decay of one reading: rate or bound, interval, mode, quality, reasons, checks and a sentence. */
export function decayOf(outcome: Outcome): Decay {
  const { stops } = outcome
  const { day, room, entry, reading, background, record, mode } = outcome
  const verdict = judgeReading(entry, record, background, suspicionOf(outcome))
  const { estimate, piece } = entry
  const given = verdict.quality !== 'refused'
  const rate = given && (verdict.kind === 'fit' || verdict.kind === 'range') ? estimate.ratePerHour : null
  const reasons = [...verdict.reasons]
  if (given && (room.air === undefined || room.air === 'unknown')) reasons.push('recirculation-possible')
  if (given && entry.coupled && !reasons.includes('neighbour-coupled')) reasons.push('neighbour-coupled')
  const change = sharedInstant(entry.changeAtStart ?? entry.changeAtEnd, stops)
  const recirculates = room.air === 'recirculating'
  const decay = {
    roomId: room.id,
    night: day.date,
    startS: entry.fromS,
    endS: entry.toS,
    kind: verdict.kind,
    airChangeRatePerHour: rate,
    airChangeRateLowPerHour: given && verdict.kind !== 'at-most' ? estimate.lowPerHour : null,
    airChangeRateHighPerHour: given && verdict.kind !== 'at-least' ? estimate.highPerHour : null,
    ...outdoorRange(entry, verdict.quality, recirculates || room.neighbour !== undefined),
    background: {
      ppm: entry.fit.backgroundPpm,
      standardUncertaintyPpm: backgroundSd(entry),
      origin: background.origin,
    },
    startPpm: entry.fit.backgroundPpm + piece.startExcessPpm,
    endPpm: entry.fit.backgroundPpm + piece.endExcessPpm,
    meanAgeMin: rate === null ? null : meanAgeMinutes(rate),
    mode: given ? mode.mode : ('unknown' as const),
    modeFrom: given ? mode.modeFrom : null,
    quality: verdict.quality,
    reasons,
    rateChangeAtS: change?.atS ?? null,
    rateChangeLowS: change?.lowS ?? null,
    rateChangeHighS: change?.highS ?? null,
    lastPersonLeftS: reading.lastPersonLeftS,
    points: pointsInside(record, entry.fromS, entry.toS),
    lagOneCorrelation: estimate.lagOne,
    effectivePoints: estimate.effectivePoints,
    residualSdPpm: estimate.residualSdPpm,
    uncertaintyParts: estimate.parts,
    checks: verdict.checks,
  }
  return { ...decay, sentence: explainDecay(decay) }
}

/** What comes from outdoors: from the fit with a neighbour where it is sure, else anything up to the whole. */
function outdoorRange(entry: Reading, quality: Decay['quality'], mixed: boolean) {
  const { coupled, estimate } = entry
  if (quality === 'refused' || !(coupled || mixed))
    return { outdoorRateLowPerHour: null, outdoorRateHighPerHour: null }
  if (!coupled || quality === 'doubtful')
    return { outdoorRateLowPerHour: 0, outdoorRateHighPerHour: estimate.highPerHour }
  return {
    outdoorRateLowPerHour: coupled.outdoorLowPerHour,
    outdoorRateHighPerHour: coupled.outdoorHighPerHour,
  }
}

function backgroundSd(entry: Reading): number {
  const size = entry.fit.ratesPerHour.length + 3
  return Math.sqrt(Math.max(0, entry.fit.covariance[(size - 2) * (size + 1)]!))
}

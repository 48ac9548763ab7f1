import { addDays } from '@/lib/time'
import { nightsBetween } from './nights'
import type { AirSystem, Mode, ModeOrigin } from './types'
import { type NotProvenCode, type VerdictReason, verdictReason } from './verdict-reasons'
import { type CombinedRate, combineDays, isUsable, type RateInterval, type RoomEstimate } from './weeks'

export type Verdict = 'meets basis' | 'short of basis' | 'not proven'

/** A quantity with its 95 % limits; `value` is null where only bounds are known, an open end is null. */
export type FlowInterval = { value: number | null; low: number | null; high: number | null }

/** A share of outdoor air in the supply, with its standard uncertainty (both 0 to 1). */
export type OutdoorFraction = { value: number; standardUncertainty: number }

export type VerdictInput = {
  /** last building-local date that counts, YYYY-MM-DD */
  throughNight: string
  /** estimates of the room, any mode and any date; the last 28 days of the right mode are taken from them */
  estimates: readonly RoomEstimate[]
  /** first night of the present rate, from findRateSteps; null when no change is known */
  lastChangeNight: string | null
  volumeM3: number
  /** relative standard uncertainty; default 0.05 */
  volumeRelativeUncertainty?: number
  /** the basis' outdoor flow, L/s; null when the room has none */
  basisFlowLps: number | null
  airSystem: AirSystem
  outdoorFraction?: OutdoorFraction | null
  /** people that the flow is shared among, for L/s per person */
  designHeadcount?: number | null
  gainRelativeUncertainty?: number
}

export type RoomVerdict = {
  verdict: Verdict
  reason: VerdictReason
  /** the typical rate of the mode, 1/h: an outdoor rate, or a dilution rate when `isDilutionRate` */
  rate: CombinedRate | null
  isDilutionRate: boolean
  /** outdoor flow, L/s; null for a dilution rate */
  flowLps: FlowInterval | null
  flowLpsPerPerson: FlowInterval | null
  days: number
  decays: number
  mode: Mode | null
  /** weakest origin of the mode among the estimates used */
  modeFrom: ModeOrigin | null
  /** first local date the figure speaks for */
  sinceNight: string
}

/** Local days that a verdict looks back over, and the least number of them it needs. */
export const VERDICT_DAYS = 28
export const VERDICT_MIN_DAYS = 5
const DEFAULT_VOLUME_UNCERTAINTY = 0.05

const scale = (interval: RateInterval, factor: number): FlowInterval => {
  const times = (value: number | null) => (value === null ? null : value * factor)
  return {
    value: times(interval.ratePerHour),
    low: times(interval.lowPerHour),
    high: times(interval.highPerHour),
  }
}

/** First date of the window: 28 local days ending on `throughNight`, or the last change if that is later. */
function windowStart(input: VerdictInput): string {
  const start = addDays(input.throughNight, 1 - VERDICT_DAYS)
  const change = input.lastChangeNight
  return change !== null && nightsBetween(start, change) > 0 ? change : start
}

const ORIGIN_STRENGTH: Record<ModeOrigin, number> = { status: 2, inferred: 1, schedule: 0 }

function weakestOrigin(estimates: readonly RoomEstimate[]): ModeOrigin | null {
  let weakest: ModeOrigin | null = null
  for (const { modeFrom } of estimates) {
    if (modeFrom === null) continue
    if (weakest === null || ORIGIN_STRENGTH[modeFrom] < ORIGIN_STRENGTH[weakest]) weakest = modeFrom
  }
  return weakest
}

/** Why no estimate of the occupied mode is there. */
function absence(inWindow: readonly RoomEstimate[]): NotProvenCode {
  const usable = inWindow.filter(isUsable)
  if (usable.length === 0) return inWindow.length === 0 ? 'no-decays' : 'all-refused'
  if (usable.some((estimate) => estimate.mode === 'unknown')) return 'mode-unknown'
  return usable.every((estimate) => estimate.mode === 'supply reduced')
    ? 'only-supply-reduced'
    : 'only-supply-off'
}

/** Whether the measured rate is one of outdoor air: the air system says so, or the outdoor fraction is known. */
function outdoorShare(input: VerdictInput): OutdoorFraction | null {
  if (input.outdoorFraction && input.outdoorFraction.value > 0) return input.outdoorFraction
  if (input.airSystem === 'outdoor' || input.airSystem === 'natural')
    return { value: 1, standardUncertainty: 0 }
  return null
}

/** Outdoor flow of the days in L/s, with the volume's, fraction's, gain's and background's terms added after combining. */
function outdoorFlow(
  used: readonly RoomEstimate[],
  input: VerdictInput,
  share: OutdoorFraction,
): FlowInterval | null {
  const combined = combineDays(used, {
    // a given fraction already says how much of the fitted rate is outdoor air
    rate: input.outdoorFraction ? 'total' : 'outdoor',
    gainRelativeUncertainty: input.gainRelativeUncertainty ?? 0,
    commonRelativeUncertainties: [
      input.volumeRelativeUncertainty ?? DEFAULT_VOLUME_UNCERTAINTY,
      share.standardUncertainty / share.value,
    ],
  })
  return combined ? scale(combined, (share.value * input.volumeM3) / 3.6) : null
}

function decide(flow: FlowInterval | null, days: number, input: VerdictInput): [Verdict, VerdictReason] {
  const basis = input.basisFlowLps
  const facts = { days, basisFlowLps: basis, flow }
  const notProven = (code: NotProvenCode): [Verdict, VerdictReason] => [
    'not proven',
    verdictReason(code, facts),
  ]
  if (flow === null) return notProven('recirculation-possible')
  if (basis === null) return notProven('no-basis')
  if (days < VERDICT_MIN_DAYS) return notProven('too-few-days')
  if (flow.low !== null && flow.low >= basis)
    return ['meets basis', verdictReason('interval-above-basis', facts)]
  if (flow.high !== null && flow.high < basis)
    return ['short of basis', verdictReason('interval-below-basis', facts)]
  if (flow.value !== null) return notProven('interval-spans-basis')
  return notProven(flow.low !== null && flow.high !== null ? 'air-from-neighbour' : 'only-bounds')
}

/**
 * Verdict on one room: outdoor flow of its occupied mode (supply on, or natural) over the last 28 local days since the last change, at
 * least 5 days, by the 95 % interval: lower end ≥ basis meets it, upper end < basis is short of it, else not proven with its reason.
 * A dilution rate (recirculating or unknown air system without a known outdoor fraction) has no flow and is never proven.
 * @throws RangeError when volume or throughNight is not usable
 * @source the verdict is this product's own definition; interval after GUM (JCGM 100)
 */
export function judgeRoom(input: VerdictInput): RoomVerdict {
  if (!(input.volumeM3 > 0))
    throw new RangeError(`a room's volume must be positive, got ${input.volumeM3} m³`)
  const sinceNight = windowStart(input)
  const inWindow = input.estimates.filter(
    (estimate) => estimate.night >= sinceNight && estimate.night <= input.throughNight,
  )
  const usable = inWindow.filter(isUsable)
  const mode: Mode = usable.some((estimate) => estimate.mode === 'supply on') ? 'supply on' : 'natural'
  const used = usable.filter((estimate) => estimate.mode === mode)
  const rate = combineDays(used, { gainRelativeUncertainty: input.gainRelativeUncertainty ?? 0 })
  const share = outdoorShare(input)
  const common = { isDilutionRate: share === null, sinceNight }
  if (rate === null) {
    const reason = verdictReason(absence(inWindow), { days: 0, basisFlowLps: input.basisFlowLps, flow: null })
    const nothing = { rate: null, flowLps: null, flowLpsPerPerson: null, days: 0, decays: 0 }
    return { verdict: 'not proven', reason, ...nothing, mode: null, modeFrom: null, ...common }
  }
  const flowLps = share ? outdoorFlow(used, input, share) : null
  const [verdict, reason] = decide(flowLps, rate.days, input)
  const persons = input.designHeadcount ?? 0
  const perPerson = (value: number | null) => (value === null ? null : value / persons)
  return {
    verdict,
    reason,
    rate,
    flowLps,
    flowLpsPerPerson:
      flowLps && persons > 0
        ? { value: perPerson(flowLps.value), low: perPerson(flowLps.low), high: perPerson(flowLps.high) }
        : null,
    days: rate.days,
    decays: rate.decays,
    mode,
    modeFrom: weakestOrigin(used),
    ...common,
  }
}

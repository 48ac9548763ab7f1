import type { NotProvenCode } from '@/lib/air/verdict-reasons'
import type { RoomVerdictRow } from '@/lib/wire/rooms'
import { counted } from './counts'

/** One figure with few enough digits to be read: 0.32, 2.4, 14. */
export function rateText(ratePerHour: number): string {
  if (ratePerHour < 0.995) return ratePerHour.toFixed(2)
  return ratePerHour < 9.95 ? ratePerHour.toFixed(1) : String(Math.round(ratePerHour))
}

/** A flow in L/s: 6.4, 64, 640. */
export function flowText(flowLps: number): string {
  return flowLps < 9.95 ? flowLps.toFixed(1) : String(Math.round(flowLps))
}

/** "2.2 to 2.6"; an open end reads "at least" or "at most". */
export function intervalWords(
  low: number | null,
  high: number | null,
  text: (value: number) => string,
): string {
  if (low !== null && high !== null) return `${text(low)} to ${text(high)}`
  if (low !== null) return `at least ${text(low)}`
  return high === null ? 'not known' : `at most ${text(high)}`
}

export type VerdictWords = { sentence: string; verdict: string }

const verdictWord = {
  'meets basis': 'Meets basis.',
  'short of basis': 'Short of basis.',
  'not proven': 'Not proven.',
} as const

/** What the room gets, for those who read air-change figures: rate, interval, how many decays, flow against basis, verdict. */
export function verdictWords(name: string, found: RoomVerdictRow | null): VerdictWords {
  if (!found) {
    return {
      sentence: `How much outdoor air ${name} gets is not known yet: no night with it has been analysed.`,
      verdict: '',
    }
  }
  const verdict = verdictWord[found.verdict]
  if (found.rateLow === null && found.rateHigh === null) return { sentence: found.sentence, verdict }
  const reason = found.verdict === 'not proven' ? ` ${found.sentence}` : ''
  return { sentence: `${rateWords(name, found)}${flowWords(found)}${reason}`, verdict }
}

function rateWords(name: string, found: RoomVerdictRow): string {
  const when = found.mode === 'natural' ? 'Without a fan' : `With ${found.mode}`
  const interval = intervalWords(found.rateLow, found.rateHigh, rateText)
  const from = `from ${counted(found.decays, 'decay')} on ${counted(found.days, 'day')}`
  const rate = found.rate === null ? interval : rateText(found.rate)
  const inside = found.rate === null ? from : `${interval}, ${from}`
  if (found.isDilutionRate) return `${when}, the air of ${name} is diluted ${rate} times an hour (${inside}).`
  return `${when}, ${name} gets ${rate} air changes an hour (${inside}).`
}

/** Reasons whose own sentence already holds the flow and the basis. */
const saysFlow = new Set(['interval-spans-basis', 'only-bounds'])

function flowWords(found: RoomVerdictRow): string {
  if (saysFlow.has(found.reason ?? '')) return ''
  if (found.flowLps === null || found.basisFlowLps === null) return ''
  const interval = intervalWords(found.flowLowLps, found.flowHighLps, flowText)
  return ` That is ${flowText(found.flowLps)} L/s of outdoor air (${interval}); its basis asks for ${flowText(found.basisFlowLps)}.`
}

const tenantReasons: Record<NotProvenCode, string> = {
  'no-basis': 'no basis is agreed for this room',
  'no-decays': 'nobody was seen leaving it for long enough to measure',
  'all-refused': 'no stretch without people in it was clean enough to measure',
  'mode-unknown': 'it is not known whether the ventilation ran while it was measured',
  'only-supply-off': 'it could be measured only after the ventilation had stopped for the day',
  'only-supply-reduced': 'it could be measured only while the ventilation was turned down',
  'too-few-days': 'it stood empty for long enough on too few days',
  'recirculation-possible': 'part of its air may come from other rooms, and how much is not known',
  'air-from-neighbour': 'part of its air comes from the room beside it, and how much is not known',
  'only-bounds': 'the measurement gives a bound, and the bound does not settle it',
  'interval-spans-basis': 'the measurement is not exact enough to tell',
}

/** The same for a tenant: met or not, in rooms, people and minutes; never in air changes. */
export function tenantVerdictWords(name: string, found: RoomVerdictRow | null): VerdictWords {
  if (!found) return { sentence: `Nothing can be said of the outdoor air in ${name} yet.`, verdict: '' }
  const agreed = found.basisName ? ` (${found.basisName})` : ''
  const period = 'Over the last four weeks'
  if (found.verdict === 'meets basis')
    return {
      sentence: `${period}, outdoor air in ${name} met the agreed basis${agreed}.`,
      verdict: 'Meets basis.',
    }
  if (found.verdict === 'short of basis') {
    return {
      sentence: `${period}, outdoor air in ${name} fell short of the agreed basis${agreed}.`,
      verdict: 'Short of basis.',
    }
  }
  const why = tenantReasons[found.reason as NotProvenCode] ?? 'it could not be measured well enough'
  return {
    sentence: `${period}, it could not be proven whether ${name} met the agreed basis${agreed}: ${why}.`,
    verdict: 'Not proven.',
  }
}

/**
 * Minutes that an empty room needs to fall from one level to another, ln(E0 / E1) / A with E above background; null where that makes
 * no sense. @source exponential decay of the single-zone mass balance (ASTM E741)
 */
export function clearMinutes(
  fromPpm: number,
  toPpm: number,
  backgroundPpm: number,
  ratePerHour: number,
): number | null {
  const before = fromPpm - backgroundPpm
  const after = toPpm - backgroundPpm
  if (!(ratePerHour > 0) || !(after > 0) || !(before > after)) return null
  return (60 * Math.log(before / after)) / ratePerHour
}

import type { FlowInterval } from './verdict'

export const NOT_PROVEN_CODES = [
  'no-basis',
  'no-decays',
  'all-refused',
  'mode-unknown',
  'only-supply-off',
  'only-supply-reduced',
  'too-few-days',
  'recirculation-possible',
  'only-bounds',
  'air-from-neighbour',
  'interval-spans-basis',
] as const
export type NotProvenCode = (typeof NOT_PROVEN_CODES)[number]
export type VerdictCode = NotProvenCode | 'interval-above-basis' | 'interval-below-basis'

/** Why a verdict is what it is: a code from the closed list and one plain sentence. */
export type VerdictReason = { code: VerdictCode; sentence: string }

type Facts = { days: number; basisFlowLps: number | null; flow: FlowInterval | null }

/** Three significant figures, plain decimals. */
function lps(value: number | null): string {
  if (value === null) return 'an unknown flow'
  const decimals = Math.max(0, 2 - Math.floor(Math.log10(Math.max(Math.abs(value), 0.01))))
  return `${Number(value.toFixed(decimals))} L/s`
}

const dayCount = (days: number) => (days === 1 ? 'one day' : `${days} days`)

/** "between 80 and 95 L/s", "at least 80 L/s", "at most 95 L/s". */
function between(flow: FlowInterval | null): string {
  if (flow === null || (flow.low === null && flow.high === null)) return 'unknown'
  if (flow.high === null) return `at least ${lps(flow.low)}`
  if (flow.low === null) return `at most ${lps(flow.high)}`
  return `between ${lps(flow.low).replace(' L/s', '')} and ${lps(flow.high)}`
}

const SENTENCES: Record<VerdictCode, (facts: Facts) => string> = {
  'interval-above-basis': ({ days, basisFlowLps, flow }) =>
    `Over ${dayCount(days)} the room got ${between(flow)} of outdoor air, all of it at or above the basis of ${lps(basisFlowLps)}.`,
  'interval-below-basis': ({ days, basisFlowLps, flow }) =>
    `Over ${dayCount(days)} the room got ${between(flow)} of outdoor air, all of it below the basis of ${lps(basisFlowLps)}.`,
  'interval-spans-basis': ({ days, basisFlowLps, flow }) =>
    `Over ${dayCount(days)} the room got ${between(flow)} of outdoor air; the basis of ${lps(basisFlowLps)} lies inside that range.`,
  'only-bounds': ({ basisFlowLps, flow }) =>
    `Only a bound is known, ${between(flow)} of outdoor air, and it does not settle the basis of ${lps(basisFlowLps)}.`,
  'air-from-neighbour': ({ days, basisFlowLps, flow }) =>
    `Part of this room's air comes from its neighbour; over ${dayCount(days)} outdoor air was ${between(flow)}, which does not settle the basis of ${lps(basisFlowLps)}.`,
  'no-basis': () => 'No basis is set for this room, so there is nothing to hold its ventilation against.',
  'no-decays': () =>
    'Nobody was seen leaving this room in the last 28 days, so its ventilation could not be measured.',
  'all-refused': () => 'Decays were found in the last 28 days, but none gave a figure; each says why.',
  'mode-unknown': () =>
    'It is not known whether the supply was on during the decays: schedule and measurement disagree, or neither is given.',
  'only-supply-off': () =>
    'Every decay happened after the supply had stopped, so none speaks for occupied hours.',
  'only-supply-reduced': () =>
    'Every decay happened at reduced supply or after it stopped, so none speaks for full occupied supply.',
  'too-few-days': ({ days }) =>
    `Only ${dayCount(days)} with a usable decay since the last change; five are needed.`,
  'recirculation-possible': () =>
    'The air may be partly recirculated, so the measured rate says how fast the room is diluted, not how much outdoor air it gets.',
}

/** The reason for a code, worded from the facts. */
export function verdictReason(code: VerdictCode, facts: Facts): VerdictReason {
  return { code, sentence: SENTENCES[code](facts) }
}

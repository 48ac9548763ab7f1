import { NEAR_LEVEL } from '@/lib/air/room-state'
import type { VerdictCode } from '@/lib/air/verdict-reasons'
import type { DigestDay, DigestStanding } from '@/lib/wire/digests'

/** "3 h 20 min", "45 min", "2 h". */
export function duration(minutes: number): string {
  const hours = Math.floor(minutes / 60)
  const rest = Math.round(minutes % 60)
  if (hours === 0) return `${rest} min`
  return rest === 0 ? `${hours} h` : `${hours} h ${rest} min`
}

export const people = (n: number): string => (n === 1 ? 'one person' : `${n} people`)

const day = new Intl.DateTimeFormat('en-GB', { day: 'numeric', timeZone: 'UTC' })
const dayAndMonth = new Intl.DateTimeFormat('en-GB', { day: 'numeric', month: 'long', timeZone: 'UTC' })
const weekdayName = new Intl.DateTimeFormat('en-GB', { weekday: 'long', timeZone: 'UTC' })

const noonUtc = (date: string) => new Date(`${date}T12:00:00Z`)

/** "9 to 15 November", "30 November to 6 December". */
export function weekInWords(from: string, to: string): string {
  const sameMonth = from.slice(0, 7) === to.slice(0, 7)
  return `${(sameMonth ? day : dayAndMonth).format(noonUtc(from))} to ${dayAndMonth.format(noonUtc(to))}`
}

/** "Monday" of a calendar date. */
export const weekdayOf = (date: string): string => weekdayName.format(noonUtc(date))

/** "25 November" of a calendar date. */
export const dateInWords = (date: string): string => dayAndMonth.format(noonUtc(date))

/** Why nothing is proven, for someone who has never met the words of the trade. */
const PLAIN_REASONS: Record<VerdictCode, string> = {
  'no-basis': 'No requirement has been entered for this room yet.',
  'no-decays': 'It was not seen to empty in the last four weeks, so it could not be measured.',
  'all-refused': 'It never stayed empty long enough to be measured well.',
  'mode-unknown': 'It is not known whether the ventilation was running while it was measured.',
  'only-supply-off': 'It emptied only after the ventilation had stopped for the day.',
  'only-supply-reduced': 'It emptied only after the ventilation had been turned down.',
  'too-few-days': 'It was measured on fewer than five days so far.',
  'recirculation-possible': 'Part of its air may be used again, so fresh outdoor air cannot be told apart.',
  'only-bounds': 'The measurement gives a limit only, and that does not settle it.',
  'air-from-neighbour': 'Part of its air comes from the room beside it, so outdoor air cannot be told apart.',
  'interval-spans-basis': 'The measurement lies so close to what was agreed that either side is possible.',
  'interval-above-basis': '',
  'interval-below-basis': '',
}

export const plainReason = (code: string | null): string =>
  PLAIN_REASONS[code as VerdictCode] ?? 'It has not been measured yet.'

/** A proven flow this close above what was agreed is "enough, just". */
const JUST_SHARE = 1.1

/** Standing of a room from its verdict and the flow's lower end, L/s. */
export function standingOf(verdict: {
  verdict: string | null
  flowLowLps: number | null
  basisFlowLps: number | null
}): DigestStanding {
  if (verdict.verdict === 'short of basis') return 'too little'
  if (verdict.verdict !== 'meets basis') return 'not proven yet'
  const { flowLowLps, basisFlowLps } = verdict
  return flowLowLps !== null && basisFlowLps !== null && flowLowLps < JUST_SHARE * basisFlowLps
    ? 'enough, just'
    : 'enough'
}

/** State of a day's fullest quarter of an hour by the level of its glass. */
export function dayState(level: number | null): DigestDay['state'] {
  if (level === null) return 'no signal'
  if (level > 1) return 'over the limit'
  return level >= NEAR_LEVEL ? 'near the limit' : 'in range'
}

import type { Tries } from '@/db/queries/sessions'

export type Limit = { tries: number; windowSeconds: number; pauseSeconds: number }

/** Five wrong passwords for one e-mail within 15 min: a pause of 5 min after each further one. */
export const EMAIL_LIMIT: Limit = { tries: 5, windowSeconds: 900, pauseSeconds: 300 }

/** Thirty wrong tries from one network address within 15 min, whatever the e-mail: a pause of 5 min. */
export const ADDRESS_LIMIT: Limit = { tries: 30, windowSeconds: 900, pauseSeconds: 300 }

/** Seconds to wait before the next try; 0 when there is none to wait. */
export function secondsToWait(limit: Limit, tries: Tries, now: Date): number {
  if (tries.wrong < limit.tries || tries.lastWrongAt === null) return 0
  const until = tries.lastWrongAt.getTime() + limit.pauseSeconds * 1000
  return Math.max(0, Math.ceil((until - now.getTime()) / 1000))
}

/** A wait in words: seconds under two minutes, then whole minutes, rounded up. */
export function waitWords(seconds: number): string {
  if (seconds < 120) return seconds === 1 ? '1 second' : `${seconds} seconds`
  return `${Math.ceil(seconds / 60)} minutes`
}

/** What someone reads after a wrong password; the same whether the e-mail is known or not. `left` counts the tries before the pause. */
export function wrongWords(left: number): string {
  const base = 'E-mail and password do not go together.'
  const pause = waitWords(EMAIL_LIMIT.pauseSeconds)
  if (left <= 0) return `${base} The next try is possible in ${pause}.`
  if (left > 2) return base
  return `${base} ${left === 1 ? 'One try' : 'Two tries'} left before a pause of ${pause}.`
}

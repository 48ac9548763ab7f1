import { addAttempt, endEverySession, endSession, lockAttempts, openSession } from '@/db/changes/sessions'
import type { Tx } from '@/db/client'
import { type Credential, getCredential, getDemoCredential } from '@/db/queries/people'
import { countWrongByAddress, countWrongByEmail } from '@/db/queries/sessions'
import { Refusal } from '@/lib/errors'
import { systemClock } from '../clock'
import { database } from '../database'
import { offersDemoSignIn } from '../env'
import { SESSION_SECONDS } from './cookie'
import { ADDRESS_LIMIT, EMAIL_LIMIT, type Limit, secondsToWait, waitWords, wrongWords } from './limits'
import { passwordFits } from './password'
import type { Signed } from './session'

/** Where a sign-in comes from; the address is null where it is not known. */
export type Caller = { address: string | null; userAgent: string | null }

export type OpenedSession = { sessionId: string; userPublicId: string }

/**
 * Signs in by e-mail (lower case) and password and opens a session. Throws a Refusal: 'not-signed-in' when they do not go together,
 * in the same words and after the same work whether or not the e-mail is known, and 'too-many' with the seconds to wait.
 */
export async function signInWithPassword(
  { email, password }: { email: string; password: string },
  caller: Caller,
): Promise<OpenedSession> {
  const admitted = await database().asSystem('sign in: count tries', (tx) => admitAttempt(tx, email, caller))
  if (admitted.waitSeconds > 0) throw tooMany(admitted.waitSeconds)
  const credential = await database().asSystem('sign in: look up', (tx) => getCredential(tx, { email }))
  const fits = await passwordFits(credential?.passwordHash, password)
  if (!fits || !credential) throw new Refusal('not-signed-in', wrongWords(admitted.triesLeft))
  return open(admitted.attemptId, credential, caller)
}

/** Signs in a person of the demo without a password; possible only where the demo's sign-ins are offered. */
export async function signInToDemo(email: string, caller: Caller): Promise<OpenedSession> {
  if (!offersDemoSignIn())
    throw new Refusal('not-allowed', 'There is no demo here. Sign in with your password.')
  const credential = await database().asSystem('demo sign-in: look up', (tx) =>
    getDemoCredential(tx, { email }),
  )
  if (!credential) throw new Refusal('not-found', `The demo has no ${email}. Start it again with npm start.`)
  const attemptId = await database().asSystem('demo sign-in: note it', (tx) =>
    addAttempt(tx, { email, address: caller.address, at: systemClock.now() }, 'wrong'),
  )
  return open(attemptId, credential, caller)
}

/** Ends this session, or with `everywhere` each session of the person. */
export async function signOut(signed: Signed, caller: Caller, everywhere: boolean): Promise<void> {
  const ending = {
    sessionId: signed.sessionId,
    userId: signed.person.id,
    email: signed.person.email,
    address: caller.address,
    now: systemClock.now(),
  }
  await database().asSystem('sign out', (tx) =>
    everywhere ? endEverySession(tx, ending) : endSession(tx, ending),
  )
}

type Admitted = { attemptId: number; triesLeft: number; waitSeconds: number }

/** Counts the tries, one attempt at a time, and writes this one down: as wrong until the password has fitted, or as limited. */
async function admitAttempt(tx: Tx, email: string, { address }: Caller): Promise<Admitted> {
  await lockAttempts(tx, { email, address })
  const now = systemClock.now()
  const since = (limit: Limit) => new Date(now.getTime() - limit.windowSeconds * 1000)
  const byEmail = await countWrongByEmail(tx, { email, since: since(EMAIL_LIMIT) })
  const byAddress = address
    ? await countWrongByAddress(tx, { address, since: since(ADDRESS_LIMIT) })
    : { wrong: 0, lastWrongAt: null }
  const waitSeconds = Math.max(
    secondsToWait(EMAIL_LIMIT, byEmail, now),
    secondsToWait(ADDRESS_LIMIT, byAddress, now),
  )
  const attemptId = await addAttempt(tx, { email, address, at: now }, waitSeconds > 0 ? 'limited' : 'wrong')
  return { attemptId, triesLeft: EMAIL_LIMIT.tries - byEmail.wrong - 1, waitSeconds }
}

function open(
  attemptId: number,
  { userId, version }: Credential,
  { userAgent }: Caller,
): Promise<OpenedSession> {
  const now = systemClock.now()
  return database().asSystem('sign in: open the session', (tx) =>
    openSession(tx, {
      attemptId,
      userId,
      userVersion: version,
      userAgent: userAgent?.slice(0, 400) ?? null,
      now,
      expiresAt: new Date(now.getTime() + SESSION_SECONDS * 1000),
    }),
  )
}

function tooMany(seconds: number): Refusal {
  return new Refusal(
    'too-many',
    `Too many wrong tries. Nothing is locked for good: the next try is possible in ${waitWords(seconds)}.`,
    { retryAfterSeconds: seconds },
  )
}

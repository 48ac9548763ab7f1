import { decode, encode } from 'next-auth/jwt'
import { getStandingSession, type StandingSession } from '@/db/queries/sessions'
import { type Scope, scopeOf } from '@/lib/policy/scope'
import { systemClock } from '../clock'
import { database } from '../database'
import { authSecret } from '../env'
import { SESSION_SECONDS } from './cookie'

/** Someone who is signed in: who they are, their place in the organisation, and the rows they may see. */
export type Signed = StandingSession & { scope: Scope }

const uuid = /^[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}$/

/** The session id inside a session cookie's value; null when the token is forged, expired or of another kind. */
export async function sessionIdOf(token: string | undefined): Promise<string | null> {
  if (!token) return null
  try {
    const payload = await decode({ token, secret: authSecret() })
    const id = payload?.sid
    return typeof id === 'string' && uuid.test(id) ? id : null
  } catch {
    return null
  }
}

/** The value of the session cookie for a session. */
export function sealSession(sessionId: string, userPublicId: string): Promise<string> {
  return encode({
    token: { sub: userPublicId, sid: sessionId },
    secret: authSecret(),
    maxAge: SESSION_SECONDS,
  })
}

/** Reads the session's row and its person; null once it is revoked, expired or outdated. */
export async function readSession(sessionId: string): Promise<Signed | null> {
  const found = await database().asSystem('read the session of a request', (tx) =>
    getStandingSession(tx, { sessionId, now: systemClock.now() }),
  )
  return found ? { ...found, scope: scopeOf(found.membership) } : null
}

/** Who holds this session cookie; null for nobody. */
export async function signedInBy(token: string | undefined): Promise<Signed | null> {
  const sessionId = await sessionIdOf(token)
  return sessionId ? readSession(sessionId) : null
}

/** Does the session still stand? An open stream asks every 30 s and after each notice of kind session. */
export async function sessionStands(sessionId: string): Promise<boolean> {
  return (await readSession(sessionId)) !== null
}

import { cookies } from 'next/headers'
import { SESSION_SECONDS, sessionCookie } from '../auth/cookie'
import { sealSession } from '../auth/session'
import type { OpenedSession } from '../auth/sign-in'

/** Gives the browser the cookie of a session just opened; only in an action or handler. */
export async function setSessionCookie({ sessionId, userPublicId }: OpenedSession): Promise<void> {
  const { name, options } = sessionCookie()
  const value = await sealSession(sessionId, userPublicId)
  ;(await cookies()).set(name, value, { ...options, maxAge: SESSION_SECONDS })
}

/** Takes the session cookie back; only in an action or handler. */
export async function dropSessionCookie(): Promise<void> {
  const { name, options } = sessionCookie()
  ;(await cookies()).set(name, '', { ...options, maxAge: 0 })
}

import { publicUrl } from '../env'

/** How long a sign-in lasts unless it is ended: 14 days. */
export const SESSION_SECONDS = 14 * 24 * 3600

/** Secure cookies wherever people come over https; over http (loopback) the browser would drop them. */
export function usesSecureCookies(): boolean {
  return publicUrl().startsWith('https://')
}

/** Name and options of the session cookie: next-auth's own, stated here so that both sides agree. */
export function sessionCookie() {
  const secure = usesSecureCookies()
  return {
    name: secure ? '__Secure-next-auth.session-token' : 'next-auth.session-token',
    options: { httpOnly: true, sameSite: 'lax' as const, path: '/', secure },
  }
}

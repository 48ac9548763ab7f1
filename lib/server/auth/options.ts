import type { AuthOptions } from 'next-auth'
import CredentialsProvider from 'next-auth/providers/credentials'
import { Refusal } from '@/lib/errors'
import { signInSchema } from '@/lib/forms/sign-in'
import { paths } from '@/lib/paths'
import { authSecret } from '../env'
import { log } from '../log'
import { addressIn } from './address'
import { SESSION_SECONDS, sessionCookie, usesSecureCookies } from './cookie'
import { EMAIL_LIMIT, waitWords, wrongWords } from './limits'
import { readSession } from './session'
import { signInWithPassword, signOut } from './sign-in'

/** What next-auth shows for a refused sign-in: a code in the address, whose words the sign-in page knows. */
const errorCode = (error: unknown) => {
  if (!(error instanceof Refusal)) return 'failed'
  return error.kind === 'too-many' ? `wait-${error.retryAfterSeconds}` : 'wrong'
}

/** The words for a code that next-auth put into the sign-in page's address; undefined where there is nothing to say. */
export function redirectedWords(code: string | undefined): string | undefined {
  if (code === undefined) return undefined
  const wait = /^wait-(\d{1,5})$/.exec(code)
  if (wait) return `Too many wrong tries. The next one is possible in ${waitWords(Number(wait[1]))}.`
  if (code === 'wrong' || code === 'CredentialsSignin') return wrongWords(EMAIL_LIMIT.tries)
  return 'The sign-in did not go through, and nothing was changed. Try again.'
}

const passwordProvider = () =>
  CredentialsProvider({
    id: 'credentials',
    name: 'E-mail and password',
    credentials: {
      email: { label: 'E-mail', type: 'email' },
      password: { label: 'Password', type: 'password' },
    },
    authorize: async (given, request) => {
      const input = signInSchema.safeParse(given)
      if (!input.success) throw new Error('wrong')
      const headers = new Headers(request.headers as Record<string, string>)
      const caller = { address: addressIn(headers), userAgent: headers.get('user-agent') }
      try {
        const { sessionId, userPublicId } = await signInWithPassword(input.data, caller)
        return { id: userPublicId, sid: sessionId }
      } catch (error) {
        if (!(error instanceof Refusal)) log().error({ err: error }, 'a sign-in failed')
        throw new Error(errorCode(error))
      }
    },
  })

/**
 * next-auth as Ebbmark uses it: the cookie is its encrypted token and carries only a session id (`sid`); whether that session stands
 * is read from the database, so that a sign-out counts at once and everywhere.
 */
export function authOptions(): AuthOptions {
  return {
    secret: authSecret(),
    session: { strategy: 'jwt', maxAge: SESSION_SECONDS },
    useSecureCookies: usesSecureCookies(),
    cookies: { sessionToken: sessionCookie() },
    pages: { signIn: paths.signIn(), signOut: paths.signIn(), error: paths.signIn() },
    providers: [passwordProvider()],
    callbacks: {
      jwt: ({ token, user }) =>
        user ? { sub: user.id, sid: (user as { sid?: string }).sid } : { sub: token.sub, sid: token.sid },
      session: async ({ session, token }) => {
        const signed = typeof token.sid === 'string' ? await readSession(token.sid) : null
        if (!signed) return { expires: session.expires }
        const { name, email } = signed.person
        return { expires: session.expires, user: { name, email } }
      },
    },
    events: {
      signOut: async ({ token }) => {
        const signed = typeof token?.sid === 'string' ? await readSession(token.sid) : null
        if (signed) await signOut(signed, { address: null, userAgent: null }, false)
      },
    },
    logger: {
      error: (code, metadata) => log().error({ code, metadata }, 'next-auth'),
      warn: (code) => log().warn({ code }, 'next-auth'),
      debug: () => undefined,
    },
  }
}

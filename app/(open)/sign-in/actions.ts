'use server'

import { redirect } from 'next/navigation'
import { z } from 'zod'
import { signInSchema } from '@/lib/forms/sign-in'
import { safeNext } from '@/lib/paths'
import { firstPageOf } from '@/lib/policy/navigation'
import { readSession } from '@/lib/server/auth/session'
import { type OpenedSession, signInToDemo, signInWithPassword } from '@/lib/server/auth/sign-in'
import { type ActionResult, action } from '@/lib/server/http/action'
import { currentCaller } from '@/lib/server/http/caller'
import { setSessionCookie } from '@/lib/server/http/session-cookie'

const byPassword = action({
  permission: 'open',
  schema: signInSchema,
  run: async (_, { email, password, next }) =>
    enter(await signInWithPassword({ email, password }, await currentCaller()), next),
})

const toDemo = action({
  permission: 'open',
  schema: z.object({ email: signInSchema.shape.email, next: signInSchema.shape.next }),
  run: async (_, { email, next }) => enter(await signInToDemo(email, await currentCaller()), next),
})

/** Gives the cookie and opens the page asked for, else the first page of the person's work. */
async function enter(opened: OpenedSession, next: string | undefined): Promise<void> {
  await setSessionCookie(opened)
  const signed = await readSession(opened.sessionId)
  redirect(safeNext(next) ?? firstPageOf(signed?.membership.roles ?? []))
}

/** What the form shows after a refused try: the words, and the e-mail as typed; never the password. */
export type SignInState = { result: ActionResult<void>; email: string } | null

/** The sign-in form's action; also works where the page's script does not run. */
export async function signIn(_earlier: unknown, form: FormData): Promise<SignInState> {
  const result = await byPassword(form)
  const email = form instanceof FormData ? String(form.get('email') ?? '') : ''
  return { result, email: email.slice(0, 254) }
}

/** Signs in one person of the demo without a password; refused where the demo's sign-ins are not offered. */
export async function signInAsDemoPerson(_earlier: unknown, form: FormData): Promise<SignInState> {
  return { result: await toDemo(form), email: '' }
}

'use server'

import { cookies } from 'next/headers'
import { redirect } from 'next/navigation'
import { z } from 'zod'
import { listBuildingsInScope } from '@/db/queries/people'
import { Refusal } from '@/lib/errors'
import { paths } from '@/lib/paths'
import { usesSecureCookies } from '@/lib/server/auth/cookie'
import { signOut } from '@/lib/server/auth/sign-in'
import { action } from '@/lib/server/http/action'
import { currentCaller } from '@/lib/server/http/caller'
import { BUILDING_COOKIE } from '@/lib/server/http/headers'
import { dropSessionCookie } from '@/lib/server/http/session-cookie'

const nothing = z.object({}).optional()

const endSession = (everywhere: boolean) =>
  action({
    permission: 'self.manage',
    schema: nothing,
    run: async (person) => {
      await signOut(person, await currentCaller(), everywhere)
      await dropSessionCookie()
    },
  })

/** To the sign-in page only when the session has ended: nobody must believe to be signed out who is not. */
async function leave(everywhere: boolean): Promise<void> {
  const left = await endSession(everywhere)({})
  if (!left.ok && left.kind !== 'not-signed-in') throw new Error(`The session did not end. ${left.detail}`)
  redirect(paths.signIn())
}

/** Ends this session. Use as `<form action={signOutHere}>`; someone whose session has already ended comes to sign-in too. */
export async function signOutHere(): Promise<void> {
  await leave(false)
}

/** Ends every session of this person, on every device. */
export async function signOutEverywhere(): Promise<void> {
  await leave(true)
}

const choose = action({
  permission: 'self.manage',
  schema: z.object({ building: z.string().max(64) }),
  run: async (person, { building }) => {
    const known = await person.read(listBuildingsInScope)
    if (!known.some(({ slug }) => slug === building)) {
      throw new Refusal('not-found', 'There is no such building here. Choose one from the list.')
    }
    const options = { httpOnly: true, sameSite: 'lax', path: '/', secure: usesSecureCookies() } as const
    ;(await cookies()).set(BUILDING_COOKIE, building, { ...options, maxAge: 365 * 24 * 3600 })
  },
})

/** Remembers the building to work on: a form with the field `building` (its slug). */
export async function chooseBuilding(form: FormData): Promise<void> {
  await choose(form)
}

import type { Metadata } from 'next'
import { redirect } from 'next/navigation'
import { DemoPeople } from '@/components/people/DemoPeople'
import { SignInForm } from '@/components/people/SignInForm'
import { SignInPicture } from '@/components/people/SignInPicture'
import { listDemoPeople } from '@/db/queries/people'
import { safeNext } from '@/lib/paths'
import { firstPageOf, rolesInWords } from '@/lib/policy/navigation'
import { redirectedWords } from '@/lib/server/auth/options'
import { database } from '@/lib/server/database'
import { offersDemoSignIn } from '@/lib/server/env'
import { currentlySigned } from '@/lib/server/http/signed'
import { signIn, signInAsDemoPerson } from './actions'

export const metadata: Metadata = { title: 'Sign in' }

type Search = { searchParams: Promise<{ next?: string | string[]; error?: string | string[] }> }

const one = (value: string | string[] | undefined) => (Array.isArray(value) ? value[0] : value)

/** Sign-in: the idea of Ebbmark once, large, and the form beside it. In the demo also one button for each of its people. */
export default async function SignInPage({ searchParams }: Search) {
  const { next, error } = await searchParams
  const after = safeNext(one(next)) ?? undefined
  const signed = await currentlySigned()
  if (signed) redirect(after ?? firstPageOf(signed.membership.roles))
  const demo = offersDemoSignIn()
    ? await database().asSystem('sign-in page: people of the demo', listDemoPeople)
    : []
  return (
    <div className="grid min-h-dvh grid-cols-[minmax(0,1fr)_480px] max-md:grid-cols-1 max-md:grid-rows-[auto_1fr]">
      <SignInPicture />
      <main
        id="main"
        className="flex flex-col justify-center border-l border-ink bg-leaf px-16 py-12 max-md:justify-start max-md:border-t max-md:border-l-0 max-md:px-5 max-md:py-8"
      >
        <h1>Sign in</h1>
        <SignInForm action={signIn} next={after} problem={redirectedWords(one(error))} />
        {demo.length > 0 && (
          <DemoPeople
            action={signInAsDemoPerson}
            next={after}
            people={demo.map(({ email, name, roles, oneBuilding }) => ({
              email,
              name,
              words: `${rolesInWords(roles)}${oneBuilding ? ', one building' : ''}`,
            }))}
          />
        )}
      </main>
    </div>
  )
}

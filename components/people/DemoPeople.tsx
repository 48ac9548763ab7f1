'use client'

import { useActionState } from 'react'
import type { SignInAction, SignInAttempt } from './SignInForm'

export type DemoPersonChoice = { email: string; name: string; words: string }

/** One button for each person of the demo; stands on the page only where the demo's sign-ins are offered. */
export function DemoPeople({
  action,
  people,
  next,
}: {
  action: SignInAction
  people: readonly DemoPersonChoice[]
  next?: string
}) {
  const [attempt, submit, busy] = useActionState<SignInAttempt, FormData>(action, null)
  return (
    <section className="mt-8 border-t border-ink pt-3" aria-labelledby="demo-people">
      <h2 id="demo-people" className="text-3">
        Or look around the demo as
      </h2>
      <form action={submit} className="mt-1">
        {next && <input type="hidden" name="next" value={next} />}
        <ul>
          {people.map(({ email, name, words }) => (
            <li key={email} className="border-b border-rule">
              <button
                type="submit"
                name="email"
                value={email}
                disabled={busy}
                className="flex w-full items-baseline gap-3 rounded-1 py-[9px] text-left hover:bg-paper max-sm:min-h-[48px]"
              >
                <span className="font-[620]">{words}</span>
                <span className="ml-auto text-2 text-ink-3">{name}</span>
              </button>
            </li>
          ))}
        </ul>
        {attempt && !attempt.result.ok && (
          <p role="alert" className="mt-2 text-2 text-silt-ink">
            {attempt.result.detail}
          </p>
        )}
      </form>
    </section>
  )
}

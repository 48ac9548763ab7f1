'use client'

import { useActionState } from 'react'
import { Button } from '@/components/ui/Button'
import { Field } from '@/components/ui/Field'

type Failure = { ok: false; detail: string; fields?: Record<string, string[]> }

/** What came back from a try: nothing yet, or why not and the e-mail as typed. */
export type SignInAttempt = { result: { ok: true } | Failure; email: string } | null

export type SignInAction = (earlier: SignInAttempt, form: FormData) => Promise<SignInAttempt>

/** E-mail and password. Sent as a plain form, so it works before (and without) the page's script. */
export function SignInForm({
  action,
  next,
  problem,
}: {
  action: SignInAction
  next?: string
  /** why the last try was refused, where it came by another way than this form */
  problem?: string
}) {
  const [attempt, submit, busy] = useActionState<SignInAttempt, FormData>(action, null)
  const failure = attempt && !attempt.result.ok ? attempt.result : null
  const fields = failure?.fields
  const whole = failure && !fields ? failure.detail : failure ? undefined : problem
  return (
    <form action={submit} className="mt-6" noValidate>
      {next && <input type="hidden" name="next" value={next} />}
      <Field
        key={attempt?.email}
        label="E-mail"
        name="email"
        type="email"
        autoComplete="username"
        required
        defaultValue={attempt?.email}
        error={fields?.email?.[0]}
        className="h-[44px]"
      />
      <Field
        label="Password"
        name="password"
        type="password"
        autoComplete="current-password"
        required
        error={fields?.password?.[0] ?? whole}
        className="h-[44px]"
      />
      <Button type="submit" look="main" className="mt-5 h-[44px] w-full" disabled={busy}>
        {busy ? 'Signing in …' : 'Sign in'}
      </Button>
    </form>
  )
}

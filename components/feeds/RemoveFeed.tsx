'use client'

import { useActionState } from 'react'
import { Button } from '@/components/ui/Button'
import { Field } from '@/components/ui/Field'
import type { Answer } from './answers'

/** Takes a feed away; asks by naming the thing. */
export function RemoveFeed({
  id,
  name,
  remove,
}: {
  id: string
  name: string
  remove: (earlier: unknown, form: FormData) => Promise<Answer<unknown>>
}) {
  const [answer, act, busy] = useActionState<Answer<unknown> | null, FormData>(remove as never, null)
  const problem = answer && !answer.ok ? (answer.fields?.name?.[0] ?? answer.detail) : undefined
  return (
    <form action={act}>
      <input type="hidden" name="id" value={id} />
      <p className="mb-3 text-2 text-ink-2">Readings that came through it stay.</p>
      <Field label={`Type ${name} to take it away`} name="name" autoComplete="off" error={problem} />
      <Button type="submit" disabled={busy} className="mt-3">
        {busy ? 'Taking it away…' : 'Take it away'}
      </Button>
    </form>
  )
}

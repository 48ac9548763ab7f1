'use client'

import { useActionState } from 'react'
import { Button } from '@/components/ui/Button'

type Answer = { ok: true; value: { queued: number } } | { ok: false; detail: string }

/** Sends the letter again to everyone who receives it. */
export function SendNow({
  digestId,
  receivers,
  send,
}: {
  digestId: string
  receivers: number
  send: (earlier: unknown, form: FormData) => Promise<Answer>
}) {
  const [answer, act, busy] = useActionState<Answer | null, FormData>(send as never, null)
  return (
    <form action={act} className="mt-3">
      <input type="hidden" name="digestId" value={digestId} />
      <Button type="submit" disabled={busy || receivers === 0}>
        {busy ? 'Sending…' : 'Send now'}
      </Button>
      {answer && (
        <p role="status" className={answer.ok ? 'mt-2 text-2 text-ink-2' : 'mt-2 text-2 text-silt-ink'}>
          {answer.ok
            ? `On its way to ${answer.value.queued === 1 ? 'one person' : `${answer.value.queued} people`}.`
            : answer.detail}
        </p>
      )}
    </form>
  )
}

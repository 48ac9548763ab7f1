'use client'

import { useActionState } from 'react'
import { Button } from '@/components/ui/Button'
import { RadioRow, TextArea } from '@/components/ui/Field'
import type { Decision as Choice, DecayDetail } from '@/lib/wire/decays'
import type { Window } from './use-refit'

type Answer = { ok: true; value: unknown } | { ok: false; detail: string; fields?: Record<string, string[]> }

/** Keep it, leave it out, or keep it with the window under the hand; the first fit is never overwritten. */
export function Decision({
  decay,
  window,
  moved,
  windowWords,
  choice,
  onChoice,
  save,
}: {
  decay: DecayDetail
  window: Window
  moved: boolean
  windowWords: string
  choice: Choice | null
  onChoice: (choice: Choice) => void
  save: (earlier: unknown, form: FormData) => Promise<Answer>
}) {
  const [answer, act, busy] = useActionState<Answer | null, FormData>(save as never, null)
  const problem = answer && !answer.ok ? answer : null
  return (
    <form action={act} id="decision" className="scroll-mt-4">
      <input type="hidden" name="decision" value={choice ?? ''} />
      <input type="hidden" name="decayId" value={decay.id} />
      <input type="hidden" name="fromS" value={window.fromS} />
      <input type="hidden" name="toS" value={window.toS} />
      <fieldset>
        <legend className="sr-only">Your decision</legend>
        <RadioRow
          name="choice"
          value="keep"
          words="Keep"
          aside={`counts in ${decay.roomName}’s week`}
          checked={choice === 'keep'}
          onChange={() => onChoice('keep')}
          disabled={decay.quality === 'refused'}
        />
        <RadioRow
          name="choice"
          value="leave out"
          words="Leave out"
          aside="stays on file, not counted"
          checked={choice === 'leave out'}
          onChange={() => onChoice('leave out')}
        />
        <RadioRow
          name="choice"
          value="keep with window"
          words="Keep with my window"
          aside={moved ? windowWords : 'move an edge first'}
          checked={choice === 'keep with window'}
          onChange={() => onChoice('keep with window')}
          disabled={!moved}
        />
      </fieldset>
      <TextArea
        label="Reason"
        name="reason"
        rows={3}
        placeholder="Asked for when you leave out or refit"
        error={problem?.fields?.reason?.[0]}
      />
      <Button type="submit" look="main" disabled={busy || choice === null} className="mt-3">
        {busy ? 'Saving…' : 'Save, next decay'}
      </Button>
      {problem && !problem.fields?.reason && (
        <p role="alert" className="mt-2 text-2 text-silt-ink">
          {problem.detail}
        </p>
      )}
      <p className="mt-2 text-2 text-ink-3">
        The first fit is never overwritten. Both stay in the audit trail.
      </p>
    </form>
  )
}

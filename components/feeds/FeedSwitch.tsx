'use client'

import { useRouter } from 'next/navigation'
import { useState, useTransition } from 'react'
import { Button } from '@/components/ui/Button'
import { TRIAL_SECONDS } from '@/lib/wire/feeds'
import { type FeedAction, NO_ANSWER, type TryAction } from './answers'
import { Trial } from './Trial'
import { useTrial } from './use-trial'

/** Tries a feed, and switches it on or off. */
export function FeedSwitch({
  id,
  enabled,
  turn,
  tryOut,
}: {
  id: string
  enabled: boolean
  turn: FeedAction<{ enabled: boolean }>
  tryOut: TryAction
}) {
  const { trial, trouble, isListening, run } = useTrial(tryOut)
  const [problem, setProblem] = useState<string | null>(null)
  const [isTurning, startTurning] = useTransition()
  const router = useRouter()
  const act = () =>
    startTurning(async () => {
      const answer = await turn({ id, enabled: !enabled }).catch(() => null)
      setProblem(answer === null ? NO_ANSWER : answer.ok ? null : answer.detail)
      router.refresh()
    })
  return (
    <section aria-label="Try it, switch it">
      <div className="flex flex-wrap gap-3">
        <Button look={enabled ? 'plain' : 'main'} onClick={act} disabled={isTurning}>
          {enabled ? 'Switch it off' : 'Switch it on'}
        </Button>
        <Button onClick={() => run({ id })} disabled={isListening}>
          Try it
        </Button>
        <p role="status" className="self-center text-2 text-ink-2">
          {isListening && `Listening for up to ${TRIAL_SECONDS} s…`}
        </p>
      </div>
      {(problem ?? trouble) && (
        <p role="alert" className="mt-3 text-2 text-silt-ink">
          {problem ?? trouble}
        </p>
      )}
      {trial && <Trial trial={trial} />}
    </section>
  )
}

'use client'

import { useState, useTransition } from 'react'
import type { FeedTrial } from '@/lib/wire/feeds'
import { type Answer, NO_ANSWER, type TryAction } from './answers'

/** Runs a trial: what it saw, why it could not be run, and whether it is listening just now. */
export function useTrial(tryOut: TryAction) {
  const [trial, setTrial] = useState<FeedTrial | null>(null)
  const [trouble, setTrouble] = useState<string | null>(null)
  const [isListening, startListening] = useTransition()
  const run = (input: unknown, onRefused?: (answer: Extract<Answer<FeedTrial>, { ok: false }>) => void) =>
    startListening(async () => {
      setTrial(null)
      setTrouble(null)
      const answer = await tryOut(input).catch(() => null)
      if (answer === null) setTrouble(NO_ANSWER)
      else if (answer.ok) setTrial(answer.value)
      else {
        setTrouble(answer.detail)
        onRefused?.(answer)
      }
    })
  return { trial, trouble, isListening, run }
}

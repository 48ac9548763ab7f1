'use client'

import { zodResolver } from '@hookform/resolvers/zod'
import { useRouter } from 'next/navigation'
import { useState, useTransition } from 'react'
import { useForm } from 'react-hook-form'
import type { z } from 'zod'
import { Button } from '@/components/ui/Button'
import { type FeedForm, feedForm } from '@/lib/forms/feed'
import { paths } from '@/lib/paths'
import { TRIAL_SECONDS } from '@/lib/wire/feeds'
import { type Answer, type FeedAction, NO_ANSWER, type TryAction } from './answers'
import { MappingFields, QuantityFields } from './MappingFields'
import { SourceFields } from './SourceFields'
import { Trial } from './Trial'
import { useTrial } from './use-trial'

type Draft = z.input<typeof feedForm>
export type FeedFormHandle = ReturnType<typeof useForm<Draft, unknown, FeedForm>>

const empty: Draft = {
  name: '',
  brokerUrl: '',
  userName: '',
  password: '',
  caPem: '',
  topicFilter: '',
  items: '',
  deviceIn: 'topic',
  deviceLevel: '',
  devicePointer: '',
  timePointer: '',
  timeFormat: 'any',
  co2Pointer: '',
  co2Unit: 'ppm',
  co2Scale: '1',
  tempPointer: '',
  tempUnit: '°C',
  tempScale: '1',
  rhPointer: '',
  rhUnit: '%',
  rhScale: '1',
  batteryPointer: '',
  batteryUnit: '%',
  batteryScale: '1',
  rssiPointer: '',
  rssiUnit: 'dBm',
  rssiScale: '1',
}

/** Describes a feed; tries it as often as wanted; keeps it switched off. */
export function FeedFormView({
  building,
  save,
  tryOut,
}: {
  building: string
  save: FeedAction<{ id: string }>
  tryOut: TryAction
}) {
  const form = useForm<Draft, unknown, FeedForm>({
    resolver: zodResolver(feedForm),
    defaultValues: empty,
    mode: 'onTouched',
  })
  const { trial, trouble, isListening, run } = useTrial(tryOut)
  const [problem, setProblem] = useState<string | null>(null)
  const [isSaving, startSaving] = useTransition()
  const router = useRouter()
  const showFields = ({ fields }: Extract<Answer<unknown>, { ok: false }>) => {
    for (const [name, [message]] of Object.entries(fields ?? {}))
      if (name in empty) form.setError(name as keyof Draft, { message })
  }
  const submit = form.handleSubmit((values) =>
    startSaving(async () => {
      const answer = await save({ ...values, building }).catch(() => null)
      setProblem(answer === null ? NO_ANSWER : answer.ok ? null : answer.detail)
      if (answer?.ok) router.push(paths.feed(answer.value.id))
      else if (answer) showFields(answer)
    }),
  )
  const attempt = form.handleSubmit((values) => run({ ...values, building }, showFields))
  return (
    <form onSubmit={submit} noValidate>
      <div className="grid gap-x-14 gap-y-10 border-t border-ink pt-4 md:grid-cols-2">
        <SourceFields form={form} />
        <div className="min-w-0">
          <MappingFields form={form} />
          <QuantityFields form={form} quantity="co2" />
          <details className="mt-4 text-2">
            <summary className="py-1 font-[600]">Temperature, humidity, battery, signal</summary>
            {(['temp', 'rh', 'battery', 'rssi'] as const).map((quantity) => (
              <QuantityFields key={quantity} form={form} quantity={quantity} />
            ))}
          </details>
        </div>
      </div>
      <div className="mt-8 flex flex-wrap gap-3">
        <Button onClick={attempt} disabled={isListening}>
          Try it
        </Button>
        <Button type="submit" look="main" disabled={isSaving}>
          {isSaving ? 'Keeping it…' : 'Keep it, switched off'}
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
    </form>
  )
}

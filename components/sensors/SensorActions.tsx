'use client'

import { useActionState } from 'react'
import { Button } from '@/components/ui/Button'
import { Field } from '@/components/ui/Field'
import { CopyField } from './CopyField'

type Answer<T> = { ok: true; value: T } | { ok: false; detail: string; fields?: Record<string, string[]> }
type FormAction<T> = (earlier: unknown, form: FormData) => Promise<Answer<T>>

/** A new secret, shown once; the old one stops working at once. */
export function RenewSecret({
  deviceId,
  renew,
}: {
  deviceId: string
  renew: FormAction<{ secret: string }>
}) {
  const [answer, act, busy] = useActionState<Answer<{ secret: string }> | null, FormData>(
    renew as never,
    null,
  )
  return (
    <form action={act}>
      <input type="hidden" name="deviceId" value={deviceId} />
      {answer?.ok ? (
        <>
          <CopyField label="New secret, shown this once" value={answer.value.secret} />
          <p className="mt-1 text-2 text-ink-3">
            The old one no longer works: type this one into the sensor now.
          </p>
        </>
      ) : (
        <>
          <p className="mb-3 text-2 text-ink-2">Makes a new one. The old secret stops working at once.</p>
          <Button type="submit" disabled={busy}>
            {busy ? 'Making it…' : 'Renew the secret'}
          </Button>
        </>
      )}
      {answer && !answer.ok && (
        <p role="alert" className="mt-2 text-2 text-silt-ink">
          {answer.detail}
        </p>
      )}
    </form>
  )
}

/** Ends a sensor's work; asks by naming the thing. */
export function RetireSensor({ deviceId, retire }: { deviceId: string; retire: FormAction<unknown> }) {
  const [answer, act, busy] = useActionState<Answer<unknown> | null, FormData>(retire as never, null)
  const problem = answer && !answer.ok ? (answer.fields?.confirm?.[0] ?? answer.detail) : undefined
  return (
    <form action={act}>
      <input type="hidden" name="deviceId" value={deviceId} />
      <p className="mb-3 text-2 text-ink-2">Retiring keeps its record and ends its work here.</p>
      <Field
        label={`Type ${deviceId} to retire it`}
        name="confirm"
        figures
        autoComplete="off"
        error={problem}
      />
      <Button type="submit" disabled={busy} className="mt-3">
        {busy ? 'Retiring…' : 'Retire the sensor'}
      </Button>
    </form>
  )
}

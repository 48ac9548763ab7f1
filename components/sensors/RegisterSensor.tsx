'use client'

import { zodResolver } from '@hookform/resolvers/zod'
import { useEffect, useState, useTransition } from 'react'
import { useForm } from 'react-hook-form'
import type { z } from 'zod'
import { Button, ButtonLink } from '@/components/ui/Button'
import { cx } from '@/components/ui/cx'
import { sensorForm } from '@/lib/forms/sensor'
import { paths } from '@/lib/paths'
import { IdentifyStep } from './IdentifyStep'
import { ListenStep } from './ListenStep'
import { type Place, PlaceStep } from './PlaceStep'

export type RegisteredSensor = {
  deviceId: string
  secret: string
  topic: string
  broker: { host: string; port: number }
}
type Answer =
  | { ok: true; value: RegisteredSensor }
  | { ok: false; detail: string; fields?: Record<string, string[]> }
export type SensorDraft = z.input<typeof sensorForm>

const draftKey = 'ebbmark-register-draft'
const steps = ['Identify', 'Place', 'Listen'] as const
const empty: SensorDraft = {
  deviceId: '',
  label: '',
  position: 'room',
  roomId: '',
  lead: true,
  intervalS: 60,
  reporting: 'interval',
}

/** Registering one sensor: on a phone one step a screen with the main button under the thumb, at a desk the three side by side. */
export function RegisterSensor({
  building,
  places,
  register,
}: {
  building: string
  places: readonly Place[]
  register: (input: unknown) => Promise<Answer>
}) {
  const form = useForm<SensorDraft, unknown, z.output<typeof sensorForm>>({
    resolver: zodResolver(sensorForm),
    defaultValues: empty,
    mode: 'onTouched',
  })
  const [step, setStep] = useState(0)
  const [made, setMade] = useState<RegisteredSensor | null>(null)
  const [trouble, setTrouble] = useState<string | null>(null)
  const [saving, startSaving] = useTransition()
  useDraft(form)

  const toPlace = async () => (await form.trigger(['deviceId', 'intervalS', 'reporting'])) && setStep(1)
  const save = form.handleSubmit(
    (values) =>
      startSaving(async () => {
        setTrouble(null)
        const answer = await register({ ...values, building }).catch(() => null)
        if (answer === null)
          setTrouble(
            'No signal: nothing was sent. What you entered is kept on this device; try again when there is signal.',
          )
        else if (answer.ok) {
          window.localStorage.removeItem(draftKey)
          setMade(answer.value)
          setStep(2)
        } else showProblems(answer, form, setTrouble, setStep)
      }),
    (errors) => setStep(errors.deviceId || errors.intervalS ? 0 : 1),
  )
  const again = () => {
    form.reset(empty)
    setMade(null)
    setStep(0)
  }

  return (
    <form onSubmit={save} noValidate className="max-md:pb-[92px]">
      <ol className="mb-4 grid grid-cols-3 gap-[6px] text-2 text-ink-3 md:hidden">
        {steps.map((name, i) => (
          <li
            key={name}
            aria-current={i === step ? 'step' : undefined}
            className={cx(
              'border-t-[3px] pt-[6px]',
              i === step
                ? 'border-ink font-[650] text-ink'
                : i < step
                  ? 'border-tide text-ink-2'
                  : 'border-rule',
            )}
          >
            {i + 1} {name}
          </li>
        ))}
      </ol>
      {trouble && (
        <p role="alert" className="mb-4 border-y border-rule bg-wash-shoal px-3 py-[9px] text-2">
          {trouble}
        </p>
      )}
      <div className="grid gap-x-14 gap-y-10 border-ink md:grid-cols-[1fr_1.15fr_1fr] md:border-t md:pt-4">
        <StepFrame number={1} name="Identify" shown={step === 0}>
          <IdentifyStep form={form} locked={made !== null} />
        </StepFrame>
        <StepFrame number={2} name="Place" shown={step === 1}>
          <PlaceStep form={form} places={places} locked={made !== null} />
        </StepFrame>
        <StepFrame number={3} name="Listen" shown={step === 2}>
          {made ? (
            <ListenStep sensor={made} intervalS={Number(form.getValues('intervalS'))} />
          ) : (
            <p className="text-ink-2">
              Save the sensor, give it its secret and switch it on. Its first reading shows here.
            </p>
          )}
        </StepFrame>
      </div>
      <div className="flex gap-3 max-md:fixed max-md:inset-x-0 max-md:bottom-0 max-md:border-t max-md:border-rule max-md:bg-paper max-md:px-5 max-md:pt-3 max-md:pb-4 md:mt-8 md:justify-end">
        {made ? (
          <>
            <Button size="touch" onClick={again} className="max-md:flex-1">
              Register another
            </Button>
            <ButtonLink href={paths.sensor(made.deviceId)} look="main" size="touch" className="max-md:flex-1">
              Done
            </ButtonLink>
          </>
        ) : (
          <>
            {step > 0 && (
              <Button size="touch" onClick={() => setStep(step - 1)} className="md:hidden">
                Back
              </Button>
            )}
            {step === 0 && (
              <Button look="main" size="touch" onClick={toPlace} className="flex-1 md:hidden">
                Continue to place
              </Button>
            )}
            <Button
              type="submit"
              look="main"
              size="touch"
              disabled={saving}
              className={cx('max-md:flex-1', step === 0 && 'max-md:hidden')}
            >
              {saving ? 'Saving…' : 'Save and listen'}
            </Button>
          </>
        )}
      </div>
    </form>
  )
}

function StepFrame({
  number,
  name,
  shown,
  children,
}: {
  number: number
  name: string
  shown: boolean
  children: React.ReactNode
}) {
  return (
    <section aria-label={name} className={cx('min-w-0', !shown && 'max-md:hidden')}>
      <h2 className="mb-3">
        <span className="text-ink-3">{number}</span> {name}
      </h2>
      {children}
    </section>
  )
}

type Form = ReturnType<typeof useForm<SensorDraft, unknown, z.output<typeof sensorForm>>>
export type SensorFormHandle = Form

/** Keeps what is entered on this device until it is saved: signal in plant rooms comes and goes. */
function useDraft(form: Form) {
  useEffect(() => {
    const kept = window.localStorage.getItem(draftKey)
    if (kept) {
      try {
        form.reset({ ...empty, ...JSON.parse(kept) })
      } catch {
        window.localStorage.removeItem(draftKey)
      }
    }
    const watching = form.watch((values) => window.localStorage.setItem(draftKey, JSON.stringify(values)))
    return () => watching.unsubscribe()
  }, [form])
}

function showProblems(
  answer: Extract<Answer, { ok: false }>,
  form: Form,
  say: (words: string) => void,
  goTo: (step: number) => void,
) {
  for (const [name, [message]] of Object.entries(answer.fields ?? {})) {
    if (name in empty) form.setError(name as keyof SensorDraft, { message })
  }
  say(answer.detail)
  goTo(answer.fields?.deviceId ? 0 : 1)
}

'use client'

import { Field, Select } from '@/components/ui/Field'
import type { SensorFormHandle } from './RegisterSensor'

/** What the sensor is: its printed code, and how it reports. */
export function IdentifyStep({ form, locked }: { form: SensorFormHandle; locked: boolean }) {
  const { register, formState, watch } = form
  const { errors } = formState
  return (
    <fieldset disabled={locked} className="disabled:opacity-70">
      <legend className="sr-only">Identify the sensor</legend>
      <Field
        label="Code on the sensor"
        figures
        autoCapitalize="off"
        autoComplete="off"
        autoCorrect="off"
        spellCheck={false}
        hint="The device id printed on its label; it is also its MQTT user name."
        error={errors.deviceId?.message}
        {...register('deviceId')}
      />
      <Field
        label="Speaks every, seconds"
        figures
        inputMode="numeric"
        hint="From its data sheet; 60 is usual."
        error={errors.intervalS?.message}
        {...register('intervalS')}
      />
      <Select label="It sends" {...register('reporting')}>
        <option value="interval">at every interval</option>
        <option value="on-change">only when the value changes</option>
      </Select>
      {watch('reporting') === 'on-change' && (
        <Field
          label="Deadband, ppm"
          figures
          inputMode="decimal"
          hint="A change smaller than this is not sent."
          error={errors.deadbandPpm?.message}
          {...register('deadbandPpm')}
        />
      )}
      <details className="mt-4 text-2">
        <summary className="py-1 font-[600]">Accuracy and range, from the data sheet</summary>
        <Field
          label="Accuracy, ± ppm"
          figures
          inputMode="decimal"
          error={errors.accuracyPpm?.message}
          {...register('accuracyPpm')}
        />
        <Field
          label="Accuracy, ± % of the reading"
          figures
          inputMode="decimal"
          error={errors.accuracyPct?.message}
          {...register('accuracyPct')}
        />
        <Field
          label="Smallest step, ppm"
          figures
          inputMode="decimal"
          error={errors.resolutionPpm?.message}
          {...register('resolutionPpm')}
        />
        <Field
          label="Top of the range, ppm"
          figures
          inputMode="decimal"
          error={errors.rangeMaxPpm?.message}
          {...register('rangeMaxPpm')}
        />
      </details>
    </fieldset>
  )
}

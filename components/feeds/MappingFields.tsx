import { Field, RadioRow, Select } from '@/components/ui/Field'
import { FEED_UNITS, type FeedQuantity } from '@/lib/wire/feed'
import type { FeedFormHandle } from './FeedFormView'

const plain = { autoCapitalize: 'off', autoCorrect: 'off', autoComplete: 'off', spellCheck: false } as const

/** Where device, time and CO2 stand in a message. */
export function MappingFields({ form }: { form: FeedFormHandle }) {
  const { register, formState, watch } = form
  const { errors } = formState
  return (
    <fieldset className="min-w-0">
      <legend className="mb-3 text-3 font-[650]">Where things stand in a message</legend>
      <Field
        {...plain}
        label="List of readings"
        figures
        placeholder="/readings"
        hint="Only where one message holds several; all below is then inside one of them."
        error={errors.items?.message}
        {...register('items')}
      />
      <fieldset className="mt-4">
        <legend className="mb-[5px] text-2 font-[600]">Device id</legend>
        <RadioRow value="topic" words="in the topic" {...register('deviceIn')} />
        <RadioRow value="payload" words="in the message" {...register('deviceIn')} />
      </fieldset>
      {watch('deviceIn') === 'topic' ? (
        <Field
          label="Level of the topic"
          figures
          inputMode="numeric"
          hint="Counted from 1: in plant/up/dev-7 the device is level 3."
          error={errors.deviceLevel?.message}
          {...register('deviceLevel')}
        />
      ) : (
        <Field
          {...plain}
          label="Device id stands at"
          figures
          placeholder="/device/id"
          error={errors.devicePointer?.message}
          {...register('devicePointer')}
        />
      )}
      <Field
        {...plain}
        label="Time stands at"
        figures
        placeholder="/time"
        hint="Empty: the time of arrival. Such readings are refused when the broker has held them."
        error={errors.timePointer?.message}
        {...register('timePointer')}
      />
      {watch('timePointer') !== '' && (
        <Select label="Time is written as" {...register('timeFormat')}>
          <option value="any">ISO 8601, or seconds or milliseconds since 1970</option>
          <option value="iso">ISO 8601 only</option>
          <option value="seconds">seconds since 1970</option>
          <option value="milliseconds">milliseconds since 1970</option>
        </Select>
      )}
    </fieldset>
  )
}

const names: Record<FeedQuantity, string> = {
  co2: 'CO2',
  temp: 'Temperature',
  rh: 'Relative humidity',
  battery: 'Battery',
  rssi: 'Signal',
}

/** One quantity: where it stands, in which unit, and by what it is to be multiplied. */
export function QuantityFields({ form, quantity }: { form: FeedFormHandle; quantity: FeedQuantity }) {
  const { register, formState } = form
  const { errors } = formState
  const name = names[quantity]
  return (
    <fieldset className="mt-4 min-w-0 border-t border-rule pt-3">
      <legend className="float-left mb-1 w-full text-2 font-[650]">{name}</legend>
      <div className="clear-both grid grid-cols-[minmax(0,1fr)_minmax(0,1fr)_88px] gap-3 max-sm:grid-cols-2 [&>div]:mt-0!">
        <Field
          {...plain}
          label={<span className="font-[500]">Stands at</span>}
          aria-label={`${name} stands at`}
          figures
          placeholder={`/values/${quantity}`}
          error={errors[`${quantity}Pointer`]?.message}
          {...register(`${quantity}Pointer`)}
        />
        <Select
          label={<span className="font-[500]">Unit</span>}
          aria-label={`${name} unit`}
          {...register(`${quantity}Unit`)}
        >
          {Object.keys(FEED_UNITS[quantity]).map((unit) => (
            <option key={unit}>{unit}</option>
          ))}
        </Select>
        <Field
          label={<span className="font-[500]">Times</span>}
          aria-label={`${name} multiplied by`}
          figures
          inputMode="decimal"
          error={errors[`${quantity}Scale`]?.message}
          {...register(`${quantity}Scale`)}
        />
      </div>
    </fieldset>
  )
}

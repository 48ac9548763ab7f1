import { Field, TextArea } from '@/components/ui/Field'
import type { FeedFormHandle } from './FeedFormView'

const plain = { autoCapitalize: 'off', autoCorrect: 'off', autoComplete: 'off', spellCheck: false } as const

/** Where the feed comes from. */
export function SourceFields({ form }: { form: FeedFormHandle }) {
  const { register, formState, watch } = form
  const { errors } = formState
  return (
    <fieldset className="min-w-0">
      <legend className="mb-3 text-3 font-[650]">Where it comes from</legend>
      <Field
        label="Name"
        hint="What people here call it."
        error={errors.name?.message}
        {...register('name')}
      />
      <Field
        {...plain}
        label="Broker"
        figures
        inputMode="url"
        placeholder="mqtts://broker.example:8883"
        error={errors.brokerUrl?.message}
        {...register('brokerUrl')}
      />
      <Field
        {...plain}
        label="User name"
        figures
        hint="Empty where the broker asks for none."
        error={errors.userName?.message}
        {...register('userName')}
      />
      <Field
        {...plain}
        label="Password"
        type="password"
        autoComplete="new-password"
        hint="Kept encrypted, never shown again."
        error={errors.password?.message}
        {...register('password')}
      />
      {watch('brokerUrl')?.startsWith('mqtts://') && (
        <TextArea
          label="Certificate of its authority"
          figures
          hint="PEM text, only where the broker’s certificate is not signed by a public authority."
          error={errors.caPem?.message}
          {...register('caPem')}
        />
      )}
      <Field
        {...plain}
        label="Topics"
        figures
        placeholder="plant/+/up"
        hint="+ stands for one level, # for all that follow."
        error={errors.topicFilter?.message}
        {...register('topicFilter')}
      />
    </fieldset>
  )
}

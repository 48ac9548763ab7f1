import { cx } from '@/components/ui/cx'
import { counted, sentenceCase } from '@/lib/format/counts'
import { type FeedSample, type FeedTrial, TRIAL_SECONDS } from '@/lib/wire/feeds'

/** What a trial saw: each message, and beside it what would be stored. */
export function Trial({ trial }: { trial: FeedTrial }) {
  return (
    <section className="mt-6 border-t border-ink pt-3" aria-label="What the trial saw">
      <h3 className="text-3">{headline(trial)}</h3>
      {trial.problem && (
        <p role="alert" className="mt-1 text-2 text-silt-ink">
          {sentenceCase(trial.problem)}.
        </p>
      )}
      {trial.samples.length > 0 && (
        <ol className="mt-2">
          {trial.samples.map((sample, index) => (
            <li key={index} className="border-t border-rule py-3 first:border-t-0">
              <Sample sample={sample} />
            </li>
          ))}
        </ol>
      )}
    </section>
  )
}

function headline({ connected, messages }: FeedTrial): string {
  if (!connected) return 'The broker did not let Ebbmark in'
  if (messages === 0)
    return `Connected, but nothing came in ${TRIAL_SECONDS} s. Are the topics right, and does anything publish just now?`
  return `${sentenceCase(counted(messages, 'message'))} came; nothing was stored`
}

function Sample({ sample }: { sample: FeedSample }) {
  return (
    <div className="grid gap-x-8 gap-y-2 md:grid-cols-2">
      <div className="min-w-0">
        <p className="fig text-[13px] break-all">{sample.topic}</p>
        <pre className="fig mt-1 max-h-[160px] overflow-auto text-1 break-all whitespace-pre-wrap text-ink-3">
          {sample.payload}
        </pre>
      </div>
      <ul className="min-w-0 text-2">
        {sample.readings.map((reading) => (
          <li key={`${reading.deviceId} ${reading.atS}`}>
            <span className="fig">{reading.deviceId}</span>{' '}
            <span className={cx('font-[600]', reading.becomes !== 'stored' && 'text-shoal-ink')}>
              {becomesWords[reading.becomes]}
            </span>
            <span className="fig block text-ink-2">
              {new Date(reading.atS * 1000).toISOString().replace('.000Z', 'Z')} {reading.co2Ppm} ppm
              {reading.tempC === null ? '' : ` ${reading.tempC} °C`}
              {reading.rhPct === null ? '' : ` ${reading.rhPct} %`}
            </span>
          </li>
        ))}
        {sample.refusals.map((refusal) => (
          <li key={refusal.detail} className="text-silt-ink">
            refused, <span className="fig">{refusal.reason}</span>: {refusal.detail}
          </li>
        ))}
      </ul>
    </div>
  )
}

const becomesWords = {
  stored: 'would be stored',
  candidate: 'is not registered in this building: not stored',
  retired: 'is retired: not stored',
} as const

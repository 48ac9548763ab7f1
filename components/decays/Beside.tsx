import { formatInTimeZone } from 'date-fns-tz'
import Link from 'next/link'
import { IntervalBar } from '@/components/ui/IntervalBar'
import { MarginSection } from '@/components/ui/Page'
import { intervalWords, rateWords } from '@/lib/format/rates'
import { paths } from '@/lib/paths'
import type { DecayDetail } from '@/lib/wire/decays'

/** Other decays of this sensor, to hold this one against. */
export function Beside({ decay }: { decay: DecayDetail }) {
  if (decay.siblings.length === 0) return null
  const max =
    Math.max(
      2,
      ...decay.siblings.map((each) => each.rateHigh ?? 0),
      decay.rateHigh ?? 0,
      decay.basisRate ?? 0,
    ) * 1.1
  return (
    <MarginSection title="Beside this one">
      <ul>
        {decay.siblings.map((each) => (
          <li
            key={each.id}
            className="grid grid-cols-[minmax(0,1fr)_112px_40px] items-center gap-3 border-t border-rule py-[6px] text-2 first:border-t-0"
          >
            <Link href={paths.decay(each.id)} className="plain-link">
              {formatInTimeZone(each.startS * 1000, decay.timeZone, 'EEE d MMM HH:mm')}
            </Link>
            <IntervalBar
              value={each.rate}
              low={each.rateLow}
              high={each.rateHigh}
              basis={decay.basisRate}
              max={max}
              widthPx={112}
              ring={each.mode !== 'supply on' && each.mode !== 'natural'}
              words={`${each.rate === null ? '' : `${rateWords(each.rate)} per hour, `}${intervalWords(each.rateLow, each.rateHigh)}, ${each.mode}`}
            />
            <span className="fig text-right">{each.rate === null ? '–' : rateWords(each.rate)}</span>
          </li>
        ))}
      </ul>
    </MarginSection>
  )
}

/** What happened to this decay so far: found, reviewed, reviewed again. */
export function SoFar({ decay }: { decay: DecayDetail }) {
  const at = (s: number) => formatInTimeZone(s * 1000, decay.timeZone, 'd MMM HH:mm')
  return (
    <MarginSection title="So far">
      <ol className="text-2">
        <li className="border-t border-rule py-2 first:border-t-0">
          <time className="fig block text-1 text-ink-3">{at(decay.createdS)}</time>
          Found and analysed, {decay.quality}.{' '}
          <span className="text-ink-3">Method {decay.methodVersion}</span>
        </li>
        {decay.reviews.map((review) => (
          <li key={review.atS} className="border-t border-rule py-2">
            <time className="fig block text-1 text-ink-3">{at(review.atS)}</time>
            {review.person}: {review.decision}
            {review.decision === 'keep with window' &&
              ` (${at(review.fromS)} to ${at(review.toS)}${review.rate === null ? '' : `, ${rateWords(review.rate)} per hour`})`}
            {review.withdrawn && ', replaced by a later decision'}
            {review.dataChanged && <b>. Data changed since this review</b>}
            {review.reason && <q className="block text-ink-2">{review.reason}</q>}
          </li>
        ))}
      </ol>
    </MarginSection>
  )
}

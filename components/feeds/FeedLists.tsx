import { formatInTimeZone } from 'date-fns-tz'
import { Table, Td, Th, Tr } from '@/components/ui/Table'
import { spaced } from '@/lib/format/counts'
import { spanWords } from '@/lib/format/spans'
import type { FeedCandidate, FeedRefusal } from '@/lib/wire/feeds'

/** Device ids that the feed names and that nobody has registered in its building. */
export function FeedCandidates({ candidates, nowS }: { candidates: readonly FeedCandidate[]; nowS: number }) {
  if (candidates.length === 0) return null
  return (
    <section className="mt-12">
      <h2 className="mb-1 text-3">Named by the feed, not registered</h2>
      <p className="mb-3 max-w-measure text-2 text-ink-2">
        Nothing of these is stored. Register a sensor under the same device id, and its readings are taken
        from then on.
      </p>
      <Table caption="Device ids that are not registered">
        <thead>
          <tr>
            <Th>Device id</Th>
            <Th numeric>
              CO2
              <br />
              ppm
            </Th>
            <Th numeric>Readings</Th>
            <Th numeric className="max-sm:hidden">
              Last heard
            </Th>
          </tr>
        </thead>
        <tbody>
          {candidates.map((candidate) => (
            <Tr key={candidate.deviceId}>
              <Td className="fig text-[13px] break-all">{candidate.deviceId}</Td>
              <Td numeric>
                {candidate.lastCo2Ppm === null ? '–' : Math.round(Number(candidate.lastCo2Ppm))}
              </Td>
              <Td numeric>{spaced(candidate.messages)}</Td>
              <Td numeric className="max-sm:hidden">
                {spanWords(nowS - candidate.lastS)} ago
              </Td>
            </Tr>
          ))}
        </tbody>
      </Table>
    </section>
  )
}

/** What of the feed was refused, newest hour first, each with what was expected and one sample. */
export function FeedRefusals({ refusals, timeZone }: { refusals: readonly FeedRefusal[]; timeZone: string }) {
  if (refusals.length === 0)
    return <p className="mt-8 text-2 text-ink-3">Nothing of this feed was refused so far.</p>
  return (
    <section className="mt-12">
      <h2 className="mb-2 text-3">Refused</h2>
      <Table caption="Refused values of this feed">
        <thead>
          <tr>
            <Th>Hour</Th>
            <Th numeric>Count</Th>
            <Th>Why</Th>
            <Th className="max-sm:hidden">Sample</Th>
          </tr>
        </thead>
        <tbody>
          {refusals.map((refusal) => (
            <Tr key={`${refusal.reason} ${refusal.hourS}`}>
              <Td className="fig text-[13px] whitespace-nowrap">
                {formatInTimeZone(refusal.hourS * 1000, timeZone, 'd MMM HH:00')}
              </Td>
              <Td numeric>{spaced(refusal.count)}</Td>
              <Td className="text-2">
                <span className="fig">{refusal.reason}</span>{' '}
                <span className="text-ink-2">{refusal.detail}</span>
              </Td>
              <Td className="fig max-w-[24em] text-1 break-all text-ink-3 max-sm:hidden">
                {refusal.sample?.slice(0, 160)}
              </Td>
            </Tr>
          ))}
        </tbody>
      </Table>
    </section>
  )
}

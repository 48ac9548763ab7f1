import Link from 'next/link'
import { longDate } from '@/lib/format/clock'
import { tenantVerdictWords, verdictWords } from '@/lib/format/verdict'
import type { RoomDetail } from '@/lib/wire/rooms'

/** Verdict and basis in a sentence: for readers of air-change figures with rate and interval, for tenants in plain words. */
export function RoomVerdict({
  detail,
  rates,
  decaysHref,
}: {
  detail: RoomDetail
  rates: boolean
  decaysHref: string | null
}) {
  const { room, verdict } = detail
  const words = rates ? verdictWords(room.name, verdict) : tenantVerdictWords(room.name, verdict)
  const basis = verdict?.basisName ? `Basis: ${verdict.basisName}.` : 'No basis is set for this room.'
  const through = verdict
    ? ` Through the night of ${longDate(verdict.throughNight, verdict.throughNight.slice(0, 4))}.`
    : ''
  return (
    <>
      <p className="lede mt-[14px] max-w-measure">
        {words.sentence} {words.verdict && <b>{words.verdict}</b>}
      </p>
      <p className="mt-2 text-2 text-ink-3">
        {basis}
        {through}{' '}
        {rates &&
          verdict?.modeFrom &&
          `Supply known by ${originWords[verdict.modeFrom] ?? verdict.modeFrom}. `}
        {decaysHref && <Link href={decaysHref}>See its decays</Link>}
      </p>
    </>
  )
}

const originWords: Record<string, string> = {
  status: 'its status signal',
  inferred: 'rooms of the same air handler changing together',
  schedule: 'its schedule alone',
}

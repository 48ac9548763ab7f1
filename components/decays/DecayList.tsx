import Link from 'next/link'
import { Fragment } from 'react'
import { cx } from '@/components/ui/cx'
import { IntervalBar } from '@/components/ui/IntervalBar'
import { GroupRow, Table, Td, Th, Tr } from '@/components/ui/Table'
import { counted } from '@/lib/format/counts'
import { intervalCell, intervalWords, rateWords } from '@/lib/format/rates'
import { reasonsPhrase } from '@/lib/format/reasons'
import { paths } from '@/lib/paths'
import { localClock } from '@/lib/time'
import type { DecaySummary } from '@/lib/wire/decays'

const columns = 6

/** Decays by night, newest first: what each says, or why it says nothing. */
export function DecayList({
  decays,
  timeZone,
  max,
  nightWords,
}: {
  decays: readonly DecaySummary[]
  timeZone: string
  max: number
  nightWords: (night: string) => string
}) {
  const nights = [...new Set(decays.map((decay) => decay.night))]
  return (
    <Table caption="Decays by night">
      <thead>
        <tr>
          <Th>Room</Th>
          <Th>From, to</Th>
          <Th numeric>
            Rate
            <br />
            1/h
          </Th>
          <Th className="max-md:hidden">95 % interval</Th>
          <Th className="max-md:hidden">Mode</Th>
          <Th className="max-sm:hidden">What it says</Th>
        </tr>
      </thead>
      <tbody>
        {nights.map((night) => {
          const own = decays.filter((decay) => decay.night === night)
          return (
            <Fragment key={night}>
              <GroupRow words={nightWords(night)} aside={counted(own.length, 'decay')} columns={columns} />
              {own.map((decay) => (
                <DecayLine key={decay.id} decay={decay} timeZone={timeZone} max={max} />
              ))}
            </Fragment>
          )
        })}
      </tbody>
    </Table>
  )
}

function DecayLine({ decay, timeZone, max }: { decay: DecaySummary; timeZone: string; max: number }) {
  const refused = decay.quality === 'refused'
  const interval = intervalWords(decay.rateLow, decay.rateHigh)
  return (
    <Tr>
      <Td className="sm:whitespace-nowrap">
        <Link href={paths.decay(decay.id)} className="plain-link">
          <span className="fig inline-block w-[44px] text-2 text-ink-3 max-sm:hidden">
            {decay.roomNumber}
          </span>
          {decay.roomName}
        </Link>
      </Td>
      <Td className="fig text-[13px] text-ink-2 sm:whitespace-nowrap">
        {localClock(decay.startS, timeZone)}–{localClock(decay.endS, timeZone)}
      </Td>
      <Td numeric className={refused ? 'text-ink-3' : 'font-[650]'}>
        {decay.rate === null
          ? refused
            ? 'none'
            : intervalCell(decay.rateLow, decay.rateHigh)
          : rateWords(decay.rate)}
      </Td>
      <Td className="max-md:hidden">
        {!refused && (
          <IntervalBar
            value={decay.rate}
            low={decay.rateLow}
            high={decay.rateHigh}
            max={max}
            widthPx={150}
            ring={decay.mode !== 'supply on' && decay.mode !== 'natural'}
            words={`${decay.roomName}: ${interval}`}
          />
        )}
      </Td>
      <Td className="text-2 whitespace-nowrap text-ink-2 max-md:hidden">{decay.mode}</Td>
      <Td className="text-2 text-ink-2 max-sm:hidden">
        <span className={cx(decay.quality === 'doubtful' && 'font-[600] text-ink')}>
          {decay.decision ? `${decay.quality}, ${decisionWords[decay.decision]}` : decay.quality}
        </span>
        {decay.reasons.length > 0 && `: ${reasonsPhrase(decay.reasons)}`}
      </Td>
    </Tr>
  )
}

const decisionWords = {
  keep: 'kept by hand',
  'leave out': 'left out by hand',
  'keep with window': 'kept with another window',
}

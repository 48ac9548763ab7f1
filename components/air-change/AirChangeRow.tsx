import Link from 'next/link'
import { cx } from '@/components/ui/cx'
import { IntervalBar } from '@/components/ui/IntervalBar'
import { Sparkline } from '@/components/ui/Sparkline'
import { Td, Tr } from '@/components/ui/Table'
import { flowWords, intervalCell, intervalWords, percentWords, rateWords } from '@/lib/format/rates'
import { paths } from '@/lib/paths'
import type { AirChangeRow } from '@/lib/wire/air-change'
import { column } from './columns'

/** What the interval bar shows, in words. */
function barWords(row: AirChangeRow): string {
  const interval = intervalWords(row.rateLow, row.rateHigh)
  if (!interval) return `${row.name}: no figure`
  const basis = row.basisRate === null ? '' : `, basis ${rateWords(row.basisRate)}`
  return `${row.name}: ${row.rate === null ? interval : `${rateWords(row.rate)} per hour, ${interval}`}${basis}`
}

/** One room: its rate with interval against the basis, and what became of it. */
export function RoomRow({
  row,
  max,
  dayWords,
}: {
  row: AirChangeRow
  max: number
  dayWords: (night: string) => string
}) {
  const short = row.verdict === 'short of basis'
  const ring = row.mode === 'supply off' || row.mode === 'supply reduced'
  return (
    <Tr>
      <Td className="whitespace-nowrap">
        <span className="fig inline-block w-[44px] text-2 text-ink-3 max-sm:hidden">{row.number}</span>
        <Link href={paths.room(row.roomId)} className="plain-link">
          {row.name}
        </Link>
      </Td>
      <Td
        numeric
        className="font-[650]"
        title={row.isDilutionRate ? 'A dilution rate: the air may be partly recirculated' : undefined}
      >
        {row.rate === null ? '–' : rateWords(row.rate)}
        {row.isDilutionRate && <span className="font-normal text-ink-3"> dil.</span>}
      </Td>
      <Td>
        <span className="max-sm:hidden">
          <IntervalBar
            value={row.rate}
            low={row.rateLow}
            high={row.rateHigh}
            basis={row.basisRate}
            max={max}
            widthPx={186}
            ring={ring}
            words={barWords(row)}
          />
        </span>
        <span className="sm:hidden">
          <IntervalBar
            value={row.rate}
            low={row.rateLow}
            high={row.rateHigh}
            basis={row.basisRate}
            max={max}
            widthPx={84}
            ring={ring}
            words={barWords(row)}
          />
        </span>
      </Td>
      <Td numeric className={cx('text-ink-2', column.interval)}>
        {intervalCell(row.rateLow, row.rateHigh)}
      </Td>
      <Td numeric className={column.decays}>
        {row.decays}
        <span className="text-ink-3">, {row.days}</span>
      </Td>
      <Td
        className={cx('text-2 whitespace-nowrap text-ink-2', column.mode)}
        title={row.modeFrom ? `from ${row.modeFrom}` : undefined}
      >
        {row.mode}
        {row.modeFrom && <span className="text-ink-3"> · {row.modeFrom}</span>}
      </Td>
      <Td numeric className={column.age}>
        {row.meanAgeMin === null ? '–' : Math.round(row.meanAgeMin)}
      </Td>
      <Td numeric className={column.flow}>
        {row.flowLps === null ? '–' : flowWords(row.flowLps)}
      </Td>
      <Td numeric className={cx('text-ink-2', column.basis)} title={row.basisName ?? undefined}>
        {row.basisFlowLps === null ? '–' : flowWords(row.basisFlowLps)}
      </Td>
      <Td numeric className={column.person}>
        <PerPerson row={row} />
      </Td>
      <Td className={column.weeks}>
        <Sparkline
          values={row.weeks.map((week) => week.rate)}
          changeAt={
            row.change ? row.weeks.findIndex((week) => week.weekStart > (row.change?.onNight ?? '')) : null
          }
          basis={row.basisRate}
          words={`${row.name}: rate by week, ${row.weeks.filter((week) => week.rate !== null).length} weeks with a figure`}
        />
      </Td>
      <Td
        className={cx('fig text-[14px] whitespace-nowrap', short && 'font-[650] text-silt-ink')}
        title={row.verdictSentence}
      >
        {row.againstBasis === null ? (
          <span className="font-text text-2 text-ink-3">no figure</span>
        ) : (
          percentWords(row.againstBasis)
        )}
      </Td>
      <Td className={cx('text-2 whitespace-nowrap', column.changed)} title={row.change?.sentence}>
        {row.change && <Changed change={row.change} dayWords={dayWords} />}
      </Td>
    </Tr>
  )
}

/** Of the design headcount, which is said in the head. */
function PerPerson({ row }: { row: AirChangeRow }) {
  if (row.flowLps === null || !row.designHeadcount) return '–'
  const asked = row.basisFlowLps === null ? null : row.basisFlowLps / row.designHeadcount
  return (
    <>
      {(row.flowLps / row.designHeadcount).toFixed(1)}
      {asked !== null && <span className="text-ink-3"> of {asked.toFixed(1)}</span>}
    </>
  )
}

function Changed({
  change,
  dayWords,
}: {
  change: NonNullable<AirChangeRow['change']>
  dayWords: (night: string) => string
}) {
  const fell = change.ratio < 1
  return (
    <>
      <span className={fell ? 'text-silt-ink' : 'text-tide-ink'}>
        {fell ? 'fell' : 'rose'} {Math.round(Math.abs(change.ratio - 1) * 100)} %
      </span>{' '}
      <span className="text-ink-3">{dayWords(change.onNight)}</span>
    </>
  )
}

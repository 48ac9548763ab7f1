import Link from 'next/link'
import { Fragment } from 'react'
import { cx } from '@/components/ui/cx'
import { GroupRow, Table, Td, Th, Tr } from '@/components/ui/Table'
import { counted } from '@/lib/format/counts'
import { spanWords } from '@/lib/format/spans'
import { paths } from '@/lib/paths'
import type { SensorRow } from '@/lib/wire/sensors'

export type SensorGroup = { key: string; words: string; rows: SensorRow[] }

const columns = 6

/** Sensors by floor with their standing; the reason stands beside it in words. */
export function SensorTable({ groups, nowS }: { groups: readonly SensorGroup[]; nowS: number }) {
  return (
    <Table caption="Sensors with their place, standing and last reading">
      <thead>
        <tr>
          <Th>Place</Th>
          <Th className="max-sm:hidden">Sensor</Th>
          <Th>Standing</Th>
          <Th numeric>
            CO2
            <br />
            ppm
          </Th>
          <Th numeric className="max-md:hidden">
            Last heard
          </Th>
          <Th numeric className="max-md:hidden">
            Signal dBm,
            <br />
            battery %
          </Th>
        </tr>
      </thead>
      <tbody>
        {groups.map((group) => (
          <Fragment key={group.key}>
            <GroupRow words={group.words} aside={counted(group.rows.length, 'sensor')} columns={columns} />
            {group.rows.map((row) => (
              <SensorLine key={row.deviceId} row={row} nowS={nowS} />
            ))}
          </Fragment>
        ))}
      </tbody>
    </Table>
  )
}

function SensorLine({ row, nowS }: { row: SensorRow; nowS: number }) {
  const trouble = row.standing === 'silent' || row.standing === 'suspect'
  return (
    <Tr>
      <Td>
        <Link href={paths.sensor(row.deviceId)} className="plain-link">
          {row.room && (
            <span className="fig inline-block min-w-[44px] pr-1 text-2 text-ink-3">{row.room.number}</span>
          )}
          {row.room?.name ?? 'Outdoors'}
        </Link>
        <span className="block text-2 text-ink-3">
          {row.label}
          {row.position && row.position !== 'room' ? ` · ${row.position}` : ''}
          {row.lead ? ' · leads the room' : ''}
        </span>
      </Td>
      <Td className="fig text-[13px] max-sm:hidden">{row.deviceId}</Td>
      <Td className="text-2">
        <span
          className={cx(
            trouble && 'font-[600]',
            row.standing === 'silent' && 'text-silt-ink',
            row.standing === 'suspect' && 'text-shoal-ink',
          )}
        >
          {row.standing}
        </span>
        {row.standingWords && <span className="block max-w-[34em] text-ink-2">{row.standingWords}</span>}
        {row.refusedToday > 0 && (
          <span className="block text-ink-3">{counted(row.refusedToday, 'message')} refused in 24 h</span>
        )}
      </Td>
      <Td numeric className={row.standing === 'silent' ? 'text-ink-3' : undefined}>
        {row.co2Ppm === null || row.standing === 'silent' ? '–' : Math.round(row.co2Ppm)}
      </Td>
      <Td numeric className="max-md:hidden">
        {row.lastAtS === null ? 'never' : `${spanWords(nowS - row.lastAtS)} ago`}
      </Td>
      <Td numeric className="text-ink-2 max-md:hidden">
        {row.rssiDbm === null ? '–' : String(row.rssiDbm).replace('-', '−')},{' '}
        {row.batteryPct === null ? '–' : Math.round(row.batteryPct)}
      </Td>
    </Tr>
  )
}

import { Fragment } from 'react'
import { IntervalScale } from '@/components/ui/IntervalBar'
import { GroupRow, type Sort, Table, Th } from '@/components/ui/Table'
import type { AirChangeSort, Group } from '@/lib/format/air-change'
import { RoomRow } from './AirChangeRow'
import { column } from './columns'

const columns = 13

/** Every room against its basis, grouped; one scale down the column lets the eye compare dots with ticks. */
export function AirChangeTable({
  groups,
  max,
  sortOf,
  dayWords,
}: {
  groups: readonly Group[]
  max: number
  sortOf: (sort: AirChangeSort) => Sort
  dayWords: (night: string) => string
}) {
  return (
    <Table
      caption="Air-change rate of every room against its basis"
      className="max-sm:[&_td]:pr-2 max-sm:[&_th]:pr-2"
    >
      <thead>
        <tr>
          <Th sort={sortOf('room')}>Room</Th>
          <Th numeric sort={sortOf('rate')}>
            Rate
            <br />
            1/h
          </Th>
          <Th>
            <span className="sr-only">Rate with its 95 % interval; the tick is the basis</span>
            <span className="max-sm:hidden">
              <IntervalScale max={max} widthPx={186} step={max > 8 ? 4 : 2} />
            </span>
          </Th>
          <Th numeric className={column.interval}>
            95 %<br />
            from, to
          </Th>
          <Th numeric className={column.decays} sort={sortOf('decays')}>
            Decays,
            <br />
            days
          </Th>
          <Th className={column.mode}>Mode</Th>
          <Th
            numeric
            className={column.age}
            sort={sortOf('age')}
            title="60 / rate: local mean age of air if the room is well mixed"
          >
            Mean age
            <br />
            min
          </Th>
          <Th numeric className={column.flow} sort={sortOf('flow')}>
            Outdoor air
            <br />
            L/s
          </Th>
          <Th numeric className={column.basis}>
            Basis
            <br />
            L/s
          </Th>
          <Th numeric className={column.person} title="Per design person, against the basis">
            Each gets
            <br />
            L/s per person
          </Th>
          <Th className={column.weeks}>By week</Th>
          <Th sort={sortOf('against basis')}>
            Against
            <br />
            basis
          </Th>
          <Th className={column.changed}>Changed</Th>
        </tr>
      </thead>
      <tbody>
        {groups.map((group) => (
          <Fragment key={group.key}>
            <GroupRow words={group.words} aside={group.aside} columns={columns} />
            {group.rows.map((row) => (
              <RoomRow key={row.roomId} row={row} max={max} dayWords={dayWords} />
            ))}
          </Fragment>
        ))}
      </tbody>
    </Table>
  )
}

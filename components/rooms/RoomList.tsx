'use client'

import Link from 'next/link'
import { useBoard } from '@/components/live/use-board'
import { useNow } from '@/components/live/use-now'
import { PageHead } from '@/components/ui/Page'
import { GroupRow, Table, Td, Th, Tr } from '@/components/ui/Table'
import { boardLead, tileWords } from '@/lib/format/board'
import { counted, sentenceCase } from '@/lib/format/counts'
import { paths } from '@/lib/paths'
import type { Board, RoomTile } from '@/lib/wire/live-board'
import { RoomGlass, toneOf } from './RoomTile'

/** Rooms by floor: number, name, level now, and what the last verdict says. */
export function RoomList({ initial, tenantOnly }: { initial: Board; tenantOnly: boolean }) {
  const { board } = useBoard(initial)
  const nowS = useNow(initial.atS)
  const columns = tenantOnly ? 5 : 6
  return (
    <>
      <PageHead
        title={sentenceCase(`${counted(board.rooms.length, 'room')} in ${board.building.name}`)}
        lead={boardLead(board.rooms)}
      />
      <Table caption="Rooms by floor">
        <thead>
          <tr>
            <Th className="w-8">
              <span className="sr-only">Level</span>
            </Th>
            <Th>Room</Th>
            <Th numeric>CO2, ppm</Th>
            <Th className="max-sm:hidden">Now</Th>
            {!tenantOnly && <Th className="max-sm:hidden">Tenancy</Th>}
            <Th>Ventilation</Th>
          </tr>
        </thead>
        {board.floors.map((floor) => {
          const own = board.rooms.filter(({ floorId }) => floorId === floor.id)
          return (
            <tbody key={floor.id}>
              <GroupRow words={floor.name} aside={counted(own.length, 'room')} columns={columns} />
              {own.map((room) => (
                <RoomRow key={room.id} room={room} nowS={nowS} tenantOnly={tenantOnly} />
              ))}
            </tbody>
          )
        })}
      </Table>
    </>
  )
}

function RoomRow({ room, nowS, tenantOnly }: { room: RoomTile; nowS: number; tenantOnly: boolean }) {
  const words = tileWords(room, nowS)
  const tone = toneOf(room)
  const supports = room.supportsPersons === null ? null : `supports ${room.supportsPersons} people`
  return (
    <Tr>
      <Td className="pl-1">
        <RoomGlass room={room} widthPx={18} heightPx={48} lipPx={3} />
      </Td>
      <Td>
        <Link href={paths.room(room.id)} className="plain-link inline-block font-[620] max-sm:py-3">
          <span className="fig text-2 font-normal text-ink-3">{room.number}</span> {room.name}
        </Link>
        <span className="block text-2 text-ink-3 max-sm:hidden">{sentenceCase(room.use)}</span>
        <span className={`block text-2 sm:hidden ${tone.say}`}>{words.say.join(', ')}</span>
      </Td>
      <Td numeric className={tone.number}>
        {words.number}
      </Td>
      <Td className={`max-sm:hidden ${tone.say}`}>{words.say.join(', ')}</Td>
      {!tenantOnly && <Td className="max-sm:hidden">{room.tenancy}</Td>}
      <Td>
        {room.verdict ?? <span className="text-ink-3">not judged yet</span>}
        {supports && <span className="block text-2 text-ink-3">{supports}</span>}
      </Td>
    </Tr>
  )
}

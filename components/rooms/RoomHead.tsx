'use client'

import type { ReactNode } from 'react'
import { useBoard } from '@/components/live/use-board'
import { useNow } from '@/components/live/use-now'
import { cx } from '@/components/ui/cx'
import { tileWords, whyWords } from '@/lib/format/board'
import { sentenceCase } from '@/lib/format/counts'
import type { Board } from '@/lib/wire/live-board'
import type { Room } from '@/lib/wire/rooms'
import { RoomGlass, toneOf } from './RoomTile'

/** "Meeting room for 12 · Cardroom Studios · 32 m², 96 m³" */
function facts(room: Room): string {
  const heads = room.designHeadcount === null ? '' : ` for ${room.designHeadcount}`
  const size = [room.floorAreaM2 && `${room.floorAreaM2} m²`, room.volumeM3 && `${room.volumeM3} m³`].filter(
    Boolean,
  )
  return [`${sentenceCase(room.use)}${heads}`, room.tenancy, size.join(', ')].filter(Boolean).join(' · ')
}

/** Glass, name, the number now and what it means; the verdict stands below as `children`. */
export function RoomHead({
  board: initial,
  room,
  children,
}: {
  board: Board
  room: Room
  children: ReactNode
}) {
  const { board } = useBoard(initial)
  const nowS = useNow(initial.atS)
  const tile = board.rooms.find(({ id }) => id === room.id)
  const words = tile && tileWords(tile, nowS)
  const tone = tile ? toneOf(tile) : { number: '', say: '' }
  const troubled =
    tile?.live?.unusual || tile?.live?.state === 'no signal' || tile?.live?.state === 'sensor suspect'
  return (
    <section className="grid grid-cols-[60px_minmax(0,1fr)] gap-x-[26px] pt-4 pb-8 max-lg:-order-3 max-sm:grid-cols-[44px_minmax(0,1fr)] max-sm:gap-x-[18px]">
      <div>{tile && <RoomGlass room={tile} widthPx={44} heightPx={176} lipPx={8} />}</div>
      <div className="min-w-0">
        <p className="text-2 text-ink-2">{facts(room)}</p>
        <h1 className="mt-px mb-2">{room.name}</h1>
        {words && (
          <p className="flex flex-wrap items-baseline gap-x-[14px]" aria-live="off">
            {words.number && (
              <span
                className={cx('text-8 leading-none font-[540] tracking-[-.02em] tabular-nums', tone.number)}
              >
                {words.number}
              </span>
            )}
            {words.unit && <span className="-ml-[6px] text-ink-2">{words.unit}</span>}
            <span className={tone.say}>{words.say.join(', ')}</span>
          </p>
        )}
        {troubled && tile && (
          <p className="mt-1 text-2 text-ink-2">{whyWords(tile, nowS, board.building.timeZone)}</p>
        )}
        {children}
      </div>
    </section>
  )
}

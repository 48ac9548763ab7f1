import { ButtonLink } from '@/components/ui/Button'
import { cx } from '@/components/ui/cx'
import { tileWords, whyWords } from '@/lib/format/board'
import { paths } from '@/lib/paths'
import type { Board, RoomTile } from '@/lib/wire/live-board'
import { RoomGlass, toneOf } from './RoomTile'

type Props = { rooms: readonly RoomTile[]; board: Board; nowS: number; brief: boolean; linked: boolean }

/** The rooms that need someone, most urgent first, each with why and the one thing to do. `brief` where many stand beside each other. */
export function NeedsSomeone({ rooms, board, nowS, brief, linked }: Props) {
  return (
    <section aria-label="Need someone, most urgent first" className="-mb-px border-t-[3px] border-ink">
      <ol
        className={cx(
          'grid max-sm:grid-cols-1',
          brief
            ? 'grid-cols-6 max-lg:grid-cols-3 max-md:grid-cols-2 max-sm:grid-cols-2'
            : 'grid-cols-4 max-lg:grid-cols-2',
        )}
      >
        {rooms.map((room) => (
          <Need key={room.id} room={room} board={board} nowS={nowS} brief={brief} linked={linked} />
        ))}
      </ol>
    </section>
  )
}

function Need({
  room,
  board,
  nowS,
  brief,
  linked,
}: {
  room: RoomTile
  board: Board
  nowS: number
  brief: boolean
  linked: boolean
}) {
  const words = tileWords(room, nowS)
  const tone = toneOf(room)
  const floor = board.floors.find(({ id }) => id === room.floorId)?.name ?? ''
  return (
    <li
      className={cx(
        'relative grid border-b border-rule lg:not-first:border-l',
        brief
          ? 'grid-cols-[28px_minmax(0,1fr)] gap-x-[13px] py-[14px] pr-3 lg:not-first:pl-4'
          : 'grid-cols-[44px_minmax(0,1fr)] gap-x-[18px] pt-4 pr-6 pb-[18px] lg:not-first:pl-6 max-sm:pr-0',
      )}
    >
      <RoomGlass room={room} widthPx={brief ? 24 : 36} heightPx={brief ? 136 : 146} lipPx={brief ? 6 : 7} />
      <div className="flex min-w-0 flex-col">
        <p className="fig text-[12.5px] leading-4 text-ink-3">
          {room.number} <span aria-hidden="true">·</span> {floor}
        </p>
        <h2 className={cx('truncate', brief ? 'text-3 leading-[19px]' : 'text-4')}>{room.name}</h2>
        <p
          className={cx(
            '-ml-[.05em] font-[520] tracking-[-.015em] tabular-nums',
            brief ? 'mt-[10px] text-[30px] leading-8' : 'mt-2 text-[44px] leading-[46px]',
            tone.number,
          )}
        >
          {words.number}
          {words.unit && (
            <small className="ml-1 text-[14px] font-normal tracking-normal text-ink-3">{words.unit}</small>
          )}
        </p>
        <p className={cx(brief ? 'text-2 leading-[16.5px]' : 'text-3 leading-5', tone.say)}>
          {words.say.join(', ')}
        </p>
        {!brief && (
          <p className="mt-[6px] text-2 leading-[18px] text-pretty text-ink-2">
            {whyWords(room, nowS, board.building.timeZone)}
          </p>
        )}
        {linked && (
          <p className="mt-auto pt-[10px]">
            <ButtonLink href={paths.room(room.id)} size="small">
              Open room<span className="sr-only"> {room.name}</span>
            </ButtonLink>
          </p>
        )}
      </div>
    </li>
  )
}

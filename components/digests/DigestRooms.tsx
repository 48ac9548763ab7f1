import Link from 'next/link'
import { cx } from '@/components/ui/cx'
import { LevelGlass } from '@/components/ui/LevelGlass'
import { paths } from '@/lib/paths'
import type { DigestContent, DigestDay, DigestRoom } from '@/lib/wire/digests'

/** The week's rooms, the one that fell short first: a glass a weekday, and how many people the ventilation carries. */
export function DigestRooms({ digest }: { digest: DigestContent }) {
  return (
    <>
      <ul className="border-t border-ink">
        {digest.rooms.map((room) => (
          <RoomLine key={room.roomId} room={room} />
        ))}
      </ul>
      <p className="mt-3 text-2 text-ink-3">
        Each glass: the fullest quarter of an hour that day. The line across it is the limit.
      </p>
      <p className="mt-2 max-w-measure text-2 text-ink-2">{digest.occupancyCaution}</p>
    </>
  )
}

function RoomLine({ room }: { room: DigestRoom }) {
  const short = room.standing === 'too little'
  return (
    <li className="grid grid-cols-[minmax(0,1fr)_250px_132px] items-center gap-x-6 gap-y-3 border-b border-rule py-[14px] max-sm:grid-cols-[minmax(0,1fr)_auto]">
      <div>
        <Link href={paths.room(room.roomId)} className="plain-link text-4 font-[650]">
          {room.name}
        </Link>
        <p className={cx('text-3', short ? 'font-[600] text-silt-ink' : 'text-ink-2')}>{room.standing}</p>
        <p className="text-2 text-ink-3">{room.reason ?? room.overWords}</p>
      </div>
      <Week days={room.days} />
      <div className="text-right max-sm:col-start-2 max-sm:row-start-1">
        {room.supportsPersons === null ? (
          <p className="text-2 text-ink-3">not known yet</p>
        ) : (
          <p>
            <b className={cx('text-5', short && 'text-silt-ink')}>{room.supportsPersons}</b>{' '}
            {room.supportsPersons === 1 ? 'person' : 'people'}
          </p>
        )}
        {room.plannedFor !== null && <p className="text-2 text-ink-3">planned for {room.plannedFor}</p>}
      </div>
    </li>
  )
}

function Week({ days }: { days: readonly DigestDay[] }) {
  if (days.length === 0)
    return (
      <p className="text-2 text-ink-3 max-sm:col-span-2">
        A room of one person: only the week’s figures are shown.
      </p>
    )
  return (
    <ol className="flex justify-between max-sm:col-span-2 max-sm:row-start-2 max-sm:max-w-[280px]">
      {days.map((day) => (
        <li key={day.date} className="flex flex-col items-center gap-1">
          <span role="img" aria-label={day.words}>
            <LevelGlass level={day.level} state={day.state} widthPx={18} heightPx={48} lipPx={3} />
          </span>
          <span aria-hidden="true" className="text-1 text-ink-3">
            {day.weekday.slice(0, 3)}
          </span>
        </li>
      ))}
    </ol>
  )
}

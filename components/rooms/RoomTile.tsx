import Link from 'next/link'
import { cx } from '@/components/ui/cx'
import { LevelGlass } from '@/components/ui/LevelGlass'
import { closeWord, tileWords } from '@/lib/format/board'
import { spaced } from '@/lib/format/counts'
import { paths } from '@/lib/paths'
import type { RoomTile as Tile } from '@/lib/wire/live-board'

/** The number and its words take silt when over or unusual, deep when near, fog when there is nothing to trust. */
export function toneOf({ live }: Tile): { number: string; say: string } {
  if (live?.unusual || live?.state === 'over the limit')
    return { number: 'text-silt-ink', say: 'font-[600] text-silt-ink' }
  if (live?.state === 'near the limit') return { number: '', say: 'font-[600] text-ink' }
  if (!live || live.state === 'no signal' || live.state === 'sensor suspect')
    return { number: 'text-fog-ink', say: 'text-ink-2' }
  return { number: '', say: 'text-ink-2' }
}

/** The glass of a room; nothing where its live value is not shown. */
export function RoomGlass({
  room,
  widthPx,
  heightPx,
  lipPx,
}: {
  room: Tile
  widthPx: number
  heightPx: number
  lipPx?: number
}) {
  const { live } = room
  return (
    <LevelGlass
      level={live?.level ?? null}
      state={live?.state ?? 'no signal'}
      ebbMarks={live?.ebbMarks}
      widthPx={widthPx}
      heightPx={heightPx}
      lipPx={lipPx}
    />
  )
}

type TileProps = { room: Tile; nowS: number; close: boolean; linked: boolean }

/** A room on the board. Full: glass, number, words, minutes over today, last verdict. Close, and on a phone: number and one word. */
export function RoomTile({ room, nowS, close, linked }: TileProps) {
  const body = close ? <CloseBody room={room} /> : <FullBody room={room} nowS={nowS} />
  const className = cx(
    'group relative grid rounded-1 pr-2 no-underline',
    close
      ? 'grid-cols-[14px_minmax(0,1fr)] gap-x-2'
      : 'grid-cols-[28px_minmax(0,1fr)] gap-x-[13px] max-sm:grid-cols-[14px_minmax(0,1fr)] max-sm:gap-x-2',
  )
  return linked ? (
    <Link href={paths.room(room.id)} className={className} prefetch={false}>
      {body}
    </Link>
  ) : (
    <div className={className}>{body}</div>
  )
}

function CloseBody({ room }: { room: Tile }) {
  const tone = toneOf(room)
  return (
    <>
      <RoomGlass room={room} widthPx={14} heightPx={54} lipPx={3} />
      <CloseWords room={room} tone={tone} />
    </>
  )
}

function CloseWords({ room, tone }: { room: Tile; tone: ReturnType<typeof toneOf> }) {
  const known = room.live && room.live.state !== 'no signal' && room.live.co2Ppm !== null
  return (
    <span className="relative min-w-0">
      <span className="fig block text-1 leading-[14px] text-ink-3">{room.number}</span>
      <span
        className={cx(
          'mt-[7px] block text-[19px] leading-5 font-[560] tabular-nums tracking-[-.02em]',
          tone.number,
        )}
      >
        {known ? spaced(room.live?.co2Ppm ?? 0) : room.hidden ? '' : '–'}
        <span className="sr-only"> ppm, {room.name}, </span>
      </span>
      <span className={cx('block text-1 leading-[14px] whitespace-nowrap', tone.say)}>{closeWord(room)}</span>
    </span>
  )
}

function FullBody({ room, nowS }: { room: Tile; nowS: number }) {
  const words = tileWords(room, nowS)
  const tone = toneOf(room)
  const over = Math.round(room.live?.overTodayMin ?? 0)
  return (
    <>
      <span className="relative max-sm:hidden">
        <RoomGlass room={room} widthPx={24} heightPx={136} />
      </span>
      <span className="relative sm:hidden">
        <RoomGlass room={room} widthPx={14} heightPx={54} lipPx={3} />
      </span>
      <span className="relative flex min-w-0 flex-col max-sm:hidden">
        <span className="fig text-1 text-ink-3">{room.number}</span>
        <span className="truncate text-[15px] leading-[19px] font-[620] group-hover:underline">
          {room.name}
        </span>
        <span
          className={cx(
            'mt-3 -ml-[.04em] text-[27px] leading-[30px] font-[560] tracking-[-.015em] tabular-nums',
            tone.number,
          )}
        >
          {words.number}
          {words.unit && (
            <small className="ml-1 text-1 font-normal tracking-normal text-ink-3">{words.unit}</small>
          )}
        </span>
        {words.say.map((line) => (
          <span key={line} className={cx('text-2 leading-[16.5px]', tone.say)}>
            {line}
          </span>
        ))}
        <span className="mt-auto text-1 text-ink-3">
          {over > 0 && <span className="block">over {over} min today</span>}
          {room.verdict && <Verdict verdict={room.verdict} />}
        </span>
      </span>
      <span className="min-w-0 sm:hidden">
        <CloseWords room={room} tone={tone} />
        <span className="block truncate text-1 text-ink-2">{room.name}</span>
      </span>
    </>
  )
}

/** Bold unless the basis is met. */
function Verdict({ verdict }: { verdict: NonNullable<Tile['verdict']> }) {
  return <span className={cx('block', verdict !== 'meets basis' && 'font-[600] text-ink-2')}>{verdict}</span>
}

/** Leaves the name of a room that is shown above in its place, so that the plan of the building never shifts. */
export function MovedTile({ room, close }: { room: Tile; close: boolean }) {
  return (
    <div
      className={cx(
        'relative grid text-ink-3',
        close
          ? 'grid-cols-[14px_minmax(0,1fr)] gap-x-2'
          : 'grid-cols-[28px_minmax(0,1fr)] gap-x-[13px] max-sm:grid-cols-[14px_minmax(0,1fr)] max-sm:gap-x-2',
      )}
    >
      <span />
      <span className="relative min-w-0">
        <span className={cx('fig block text-1', close && 'leading-[14px]')}>{room.number}</span>
        {!close && (
          <span className="block truncate text-[15px] leading-[19px] max-sm:hidden">{room.name}</span>
        )}
        <span className={cx('block', close ? 'mt-2 text-1' : 'mt-[18px] text-2 max-sm:mt-2 max-sm:text-1')}>
          {close ? 'above' : 'shown above'}
        </span>
      </span>
    </div>
  )
}

import { cx } from '@/components/ui/cx'
import { supplyWords } from '@/lib/format/board'
import { counted, countWord } from '@/lib/format/counts'
import type { Board, RoomTile as Tile } from '@/lib/wire/live-board'
import { MovedTile, RoomTile } from './RoomTile'

type Props = {
  board: Board
  rooms: readonly Tile[]
  /** ids of the rooms that stand in the strip above */
  above: ReadonlySet<string>
  nowS: number
  close: boolean
  linked: boolean
}

/** Floors stacked as in the building; rooms keep their places along one horizon. */
export function BoardFloors({ board, rooms, above, nowS, close, linked }: Props) {
  return board.floors.map((floor) => {
    const own = rooms.filter(({ floorId }) => floorId === floor.id)
    if (own.length === 0) return null
    const shownAbove = own.filter(({ id }) => above.has(id)).length
    return (
      <section key={floor.id} className={close ? 'mt-5' : 'mt-6'}>
        <header
          className={cx(
            'flex flex-wrap items-baseline gap-x-4 border-t border-ink',
            close ? 'pt-[6px] pb-3' : 'pt-2 pb-[14px]',
          )}
        >
          <h2 className="text-3">{floor.name}</h2>
          <p className="text-2 text-ink-3">
            {counted(own.length, 'room')}
            {shownAbove > 0 && `, ${countWord(shownAbove)} shown above`}
          </p>
          <p className="ml-auto text-2 text-ink-3 max-sm:ml-0">
            {supplyWords(floor.supply, nowS, board.building.timeZone)}
          </p>
        </header>
        <ul className={cx('grid', close ? closeGrid : fullGrid)}>
          {own.map((room) => (
            <li
              key={room.id}
              className={cx(
                horizon,
                close ? 'before:top-[18px]' : 'before:top-[45px] max-sm:before:top-[18px]',
              )}
            >
              {above.has(room.id) ? (
                <MovedTile room={room} close={close} />
              ) : (
                <RoomTile room={room} nowS={nowS} close={close} linked={linked} />
              )}
            </li>
          ))}
        </ul>
      </section>
    )
  })
}

const horizon = 'relative before:absolute before:inset-x-0 before:h-px before:bg-rule'
const fullGrid =
  'grid-cols-8 gap-y-5 max-lg:grid-cols-[repeat(auto-fill,minmax(160px,1fr))] max-sm:grid-cols-3'
const closeGrid = 'grid-cols-12 gap-y-4 max-lg:grid-cols-8 max-md:grid-cols-6 max-sm:grid-cols-4'

import type { Board, RoomTile } from '@/lib/wire/live-board'

/** Wednesday 10 June 2026, 12:00 UTC. */
export const NOW = Date.UTC(2026, 5, 10, 12) / 1000

const quiet: NonNullable<RoomTile['live']> = {
  state: 'in range',
  co2Ppm: 600,
  atS: NOW - 6,
  level: 0.2,
  trend: null,
  slopePpmPerMin: null,
  overSinceS: null,
  overTodayMin: 0,
  limitInMin: null,
  emptySinceS: null,
  ebbMarks: [],
  unusual: false,
}

/** A room of the board with this number; what is not given is quiet. */
export function room(number: string, live: Partial<NonNullable<RoomTile['live']>>): RoomTile {
  return {
    id: `id-${number}`,
    number,
    name: `Room ${number}`,
    use: 'meeting room',
    floorId: Number.parseInt(number, 10) || 0,
    tenancy: number.startsWith('2') ? 'Weir Learning' : 'Bobbin Press',
    singlePerson: false,
    outdoorPpm: 438,
    limitPpm: 1238,
    live: { ...quiet, ...live },
    hidden: false,
    suspectReason: null,
    verdict: 'meets basis',
    supportsPersons: 9,
    designHeadcount: 12,
  }
}

/** A board of three floors with these rooms. */
export function boardOf(rooms: readonly RoomTile[]): Board {
  const floor = (id: number, name: string) => ({ id, name, ordinal: id, supply: null })
  return {
    building: { slug: 'mill', name: 'Mill', timeZone: 'Europe/London' },
    atS: NOW,
    outdoor: { ppm: 438, measured: true },
    lastReadingS: NOW - 6,
    floors: [floor(2, 'Second floor'), floor(1, 'First floor'), floor(0, 'Ground floor')],
    rooms: [...rooms],
  }
}

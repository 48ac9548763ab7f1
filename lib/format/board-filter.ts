import type { Board, RoomTile } from '@/lib/wire/live-board'
import { isShown, SHOW_WORDS, SHOWS, type Show } from './board'

/** From this many rooms on the board sets close tiles, unless the reader chose. */
export const CLOSE_FROM = 41

/** What of the board is shown, as it stands in the address. */
export type BoardFilter = {
  floor: number | null
  tenancy: string | null
  show: Show
  tiles: 'full' | 'close' | null
}

type Search = Record<string, string | string[] | undefined>
const one = (value: string | string[] | undefined) => (Array.isArray(value) ? value[0] : value)

/** Reads the filter from the address; what is not usable counts as not given. */
export function boardFilterOf(search: Search): BoardFilter {
  const floor = Number(one(search.floor) ?? Number.NaN)
  const tiles = one(search.tiles)
  return {
    floor: Number.isInteger(floor) ? floor : null,
    tenancy: one(search.tenancy) ?? null,
    show: SHOWS.find((show) => show === one(search.show)) ?? 'every',
    tiles: tiles === 'full' || tiles === 'close' ? tiles : null,
  }
}

/** The address of the board with this filter. */
export function boardAddress(filter: BoardFilter, base = '/rounds'): string {
  const search = new URLSearchParams()
  if (filter.floor !== null) search.set('floor', String(filter.floor))
  if (filter.tenancy !== null) search.set('tenancy', filter.tenancy)
  if (filter.show !== 'every') search.set('show', filter.show)
  if (filter.tiles !== null) search.set('tiles', filter.tiles)
  return search.size > 0 ? `${base}?${search}` : base
}

/** Does the room belong to the tenancy, or is none chosen? */
export const hasTenancy = (room: RoomTile, tenancy: string | null) =>
  tenancy === null || room.tenancy === tenancy

/** Close tiles: as chosen, else by the number of rooms. */
export const isClose = (filter: BoardFilter, rooms: number) =>
  filter.tiles === null ? rooms >= CLOSE_FROM : filter.tiles === 'close'

const floorWord = (name: string) => name.replace(/ floor$/i, '').toLowerCase()

/** The filters as words with counts, each an address; a choice of one is left out. */
export function boardFilters(board: Board, walked: readonly RoomTile[], filter: BoardFilter) {
  const tenancies = [...new Set(board.rooms.flatMap(({ tenancy }) => (tenancy ? [tenancy] : [])))].sort()
  const floors = {
    label: 'Floor',
    choices: [
      { word: 'all', floor: null as number | null },
      ...board.floors.map(({ id, name }) => ({ word: floorWord(name), floor: id as number | null })),
    ].map(({ word, floor }) => ({
      word,
      href: boardAddress({ ...filter, floor }),
      current: filter.floor === floor,
    })),
  }
  const tenants = {
    label: 'Tenancy',
    choices: [null, ...tenancies].map((tenancy) => ({
      word: tenancy ?? 'all',
      href: boardAddress({ ...filter, tenancy }),
      current: filter.tenancy === tenancy,
    })),
  }
  const shows = {
    label: 'Show',
    choices: SHOWS.map((show) => ({
      word: SHOW_WORDS[show],
      href: boardAddress({ ...filter, show }),
      current: filter.show === show,
      count: walked.filter((room) => isShown(room, show)).length,
    })),
  }
  return [floors, tenants, shows].filter(({ choices }) => choices.length > 2)
}

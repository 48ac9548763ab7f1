import type { RoomState } from '@/lib/air/room-state'
import type { Board, RoomTile } from '@/lib/wire/live-board'
import { dayAndClock, zonedStamp } from './clock'
import { counted, countWord, duration, sentenceCase, spaced } from './counts'

export const SHOWS = ['every', 'near-or-over', 'falling', 'trouble'] as const
export type Show = (typeof SHOWS)[number]

export const SHOW_WORDS: Record<Show, string> = {
  every: 'every room',
  'near-or-over': 'near or over',
  falling: 'falling',
  trouble: 'sensor trouble',
}

const shown: Record<Show, readonly RoomState[]> = {
  every: [],
  'near-or-over': ['near the limit', 'over the limit'],
  falling: ['falling'],
  trouble: ['no signal', 'sensor suspect'],
}

/** Does the room belong to this choice of the filter? */
export function isShown(room: RoomTile, show: Show): boolean {
  return show === 'every' || (room.live !== null && shown[show].includes(room.live.state))
}

/** Has the sensor spoken at least once? One that has not is awaited, not missed. */
const hasSpoken = (room: RoomTile) => room.live !== null && room.live.atS !== null

/** Urgency, 0 for none: an unusual level, over the limit, no signal, sensor suspect. */
function urgency(room: RoomTile): number {
  if (!room.live || !hasSpoken(room)) return 0
  if (room.live.unusual) return 4
  if (room.live.state === 'over the limit') return 3
  if (room.live.state === 'no signal') return 2
  return room.live.state === 'sensor suspect' ? 1 : 0
}

/** The rooms that need someone, most urgent first; of equal ones the one that has stood so longest, then the higher level. */
export function needSomeone(rooms: readonly RoomTile[]): RoomTile[] {
  const since = (room: RoomTile) => room.live?.overSinceS ?? room.live?.atS ?? 0
  return rooms
    .filter((room) => urgency(room) > 0)
    .sort(
      (a, b) => urgency(b) - urgency(a) || since(a) - since(b) || (b.live?.level ?? 0) - (a.live?.level ?? 0),
    )
}

/** "Four rooms need someone", "One room needs someone", "No room needs anyone". */
export function boardTitle(needing: number): string {
  if (needing === 0) return 'No room needs anyone'
  return `${sentenceCase(counted(needing, 'room'))} ${needing === 1 ? 'needs' : 'need'} someone`
}

/** "Of 24: two over the limit, one silent, one sensor suspect. Three more are near the limit." */
export function boardLead(rooms: readonly RoomTile[]): string {
  const count = (test: (room: RoomTile) => boolean) => rooms.filter(test).length
  const states = (state: RoomState) => count((room) => room.live?.state === state && hasSpoken(room))
  const parts: string[] = []
  const unusual = count((room) => room.live?.unusual === true)
  const over = states('over the limit')
  if (unusual) parts.push(`${countWord(unusual)} at an unusual level`)
  if (over) parts.push(`${countWord(over)} over the limit`)
  if (states('no signal')) parts.push(`${countWord(states('no signal'))} silent`)
  if (states('sensor suspect'))
    parts.push(counted(states('sensor suspect'), 'sensor suspect', 'sensors suspect'))
  const near = states('near the limit')
  const nearWords =
    near === 0
      ? ''
      : `${sentenceCase(countWord(near))}${parts.length > 0 ? ' more' : ''} ${near === 1 ? 'is' : 'are'} near the limit.`
  const first =
    parts.length > 0
      ? `Of ${rooms.length}: ${parts.join(', ')}.`
      : `${sentenceCase(counted(rooms.length, 'room'))}, all below the limit and heard.`
  return `${first} ${nearWords}`.trim()
}

export type TileWords = { number: string; unit: string; say: string[]; strong: boolean }

const arrows = { rising: '↑ ', falling: '↓ ', steady: '' } as const

/** What a tile says of the room now, in at most two lines. */
export function tileWords(room: RoomTile, nowS: number): TileWords {
  const { live } = room
  if (room.hidden)
    return { number: '', unit: '', say: ['one person’s room', 'weekly figures only'], strong: false }
  if (!live) return { number: '–', unit: '', say: ['no sensor placed'], strong: false }
  if (live.state === 'no signal') {
    const say =
      live.atS === null ? ['awaiting first reading'] : [`no signal for ${duration(nowS - live.atS)}`]
    return { number: '–', unit: '', say, strong: false }
  }
  const number = spaced(live.co2Ppm ?? 0)
  const common = { number, unit: 'ppm' }
  const trend = `${live.trend ? arrows[live.trend] : ''}${live.trend ?? ''}`
  if (live.unusual) return { ...common, say: ['unusual level', 'check room and sensor'], strong: true }
  switch (live.state) {
    case 'sensor suspect':
      return { ...common, say: ['sensor suspect'], strong: false }
    case 'over the limit':
      return {
        ...common,
        say: [`over the limit for ${duration(nowS - (live.overSinceS ?? nowS))}`],
        strong: true,
      }
    case 'near the limit': {
      const over =
        live.limitInMin === null ? trend : `over in ${Math.max(1, Math.round(live.limitInMin))} min`
      return {
        ...common,
        say: [`${live.trend ? arrows[live.trend] : ''}near the limit`, over].filter(Boolean),
        strong: true,
      }
    }
    case 'falling':
      return {
        ...common,
        say: ['↓ falling', `empty for ${duration(nowS - (live.emptySinceS ?? nowS))}`],
        strong: false,
      }
    default: {
      const limit =
        live.limitInMin === null ? [] : [`limit in ${Math.max(1, Math.round(live.limitInMin))} min`]
      return { ...common, say: [trend, ...limit].filter(Boolean), strong: false }
    }
  }
}

/** One word of a close tile. */
export function closeWord(room: RoomTile): string {
  if (room.hidden) return 'private'
  if (!room.live) return 'no sensor'
  if (room.live.unusual) return 'unusual'
  const short: Record<RoomState, string> = {
    'in range': '',
    'near the limit': 'near',
    'over the limit': 'over',
    falling: 'falling',
    'no signal': hasSpoken(room) ? 'no signal' : 'awaited',
    'sensor suspect': 'suspect',
  }
  return short[room.live.state]
}

/** Why a room needs someone and what helps, in one or two sentences. */
export function whyWords(room: RoomTile, nowS: number, timeZone: string): string {
  const { live } = room
  if (!live) return ''
  if (live.unusual) return 'Unusual level: check room and sensor; follow the site’s emergency procedure.'
  if (live.state === 'no signal' && live.atS !== null) {
    const last = `Last heard ${dayAndClock(live.atS, nowS, timeZone)} at ${spaced(live.co2Ppm ?? 0)} ppm.`
    return `${last} See to its power and its gateway.`
  }
  if (live.state === 'sensor suspect') {
    const reason = room.suspectReason ?? 'its readings do not fit'
    return `${sentenceCase(reason).replace(/\.?$/, '.')} Give it the fresh-air check, or swap it.`
  }
  return overWords(room)
}

function overWords({ live, supportsPersons, designHeadcount }: RoomTile): string {
  const slope = live?.slopePpmPerMin ?? 0
  const moving =
    live?.trend === 'rising'
      ? `Rising ${Math.max(1, Math.round(slope))} ppm a minute.`
      : live?.trend === 'falling'
        ? `Falling ${Math.max(1, Math.round(-slope))} ppm a minute.`
        : 'Holding its level.'
  if (supportsPersons === null) return `${moving} Fewer people, or more outdoor air.`
  const design = designHeadcount === null ? '' : `, and it is meant for ${designHeadcount}`
  return `${moving} Its ventilation supports ${supportsPersons} people${design}.`
}

/** "supply on since 07:00", or nothing where the air handlers of the floor differ or say nothing. */
export function supplyWords(
  supply: Board['floors'][number]['supply'],
  nowS: number,
  timeZone: string,
): string {
  if (!supply) return ''
  const how = supply.origin === 'schedule' ? ' by schedule' : ''
  return `supply ${supply.state}${how} since ${dayAndClock(supply.sinceS, nowS, timeZone)}`
}

/** "1238 ppm", or "800 ppm above outdoor" where rooms have different ones. */
export function limitWords(rooms: readonly RoomTile[]): string {
  const limits = [...new Set(rooms.map(({ limitPpm }) => Math.round(limitPpm)))].sort((a, b) => a - b)
  if (limits.length === 0) return ''
  if (limits.length === 1) return `limit ${spaced(limits[0]!)} ppm`
  return `limits ${spaced(limits[0]!)} to ${spaced(limits[limits.length - 1]!)} ppm`
}

/** "Last reading 6 seconds ago", "Last reading 14:02"; nothing heard yet is said too. */
export function lastReadingWords(lastReadingS: number | null, nowS: number, timeZone: string): string {
  if (lastReadingS === null) return 'No reading yet'
  const ago = Math.max(0, Math.round(nowS - lastReadingS))
  if (ago < 120) return `Last reading ${ago === 1 ? '1 second' : `${ago} seconds`} ago`
  if (ago < 3600) return `Last reading ${Math.round(ago / 60)} minutes ago`
  const { day, clock } = zonedStamp(lastReadingS, timeZone)
  return `Last reading ${day} ${clock}`
}

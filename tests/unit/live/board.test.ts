import { describe, expect, test } from 'vitest'
import {
  boardLead,
  boardTitle,
  isShown,
  lastReadingWords,
  limitWords,
  needSomeone,
  tileWords,
  whyWords,
} from '@/lib/format/board'
import { boardAddress, boardFilterOf, boardFilters, isClose } from '@/lib/format/board-filter'
import { changeBetween, samePlan } from '@/lib/server/live/building-board'
import { waitBeforeTry } from '@/lib/server/live/listener'
import { visibleChange, visibleRooms } from '@/lib/server/live/visible'
import { applyChange, boardChangeSchema, boardSchema } from '@/lib/wire/live-board'
import { boardOf, NOW, room } from './rooms'

const rooms = [
  room('2.02', {
    state: 'over the limit',
    co2Ppm: 1307,
    level: 1.1,
    overSinceS: NOW - 42 * 60,
    trend: 'steady',
  }),
  room('1.02', {
    state: 'over the limit',
    co2Ppm: 1244,
    level: 1.02,
    overSinceS: NOW - 6 * 60,
    trend: 'rising',
    slopePpmPerMin: 9,
  }),
  room('1.05', { state: 'no signal', co2Ppm: 758, atS: NOW - 97 * 60 }),
  room('2.05', { state: 'sensor suspect', co2Ppm: 371 }),
  room('2.04', { state: 'near the limit', co2Ppm: 1118, level: 0.9, trend: 'rising', limitInMin: 14.2 }),
  room('2.06', { state: 'falling', co2Ppm: 655, emptySinceS: NOW - 32 * 60, trend: 'falling' }),
  room('G.01', { state: 'in range', co2Ppm: 521, trend: 'steady' }),
  room('G.02', { state: 'no signal', co2Ppm: null, atS: null }),
]

describe('what the board says', () => {
  test('the headline counts in words, and the lead says what of', () => {
    const needing = needSomeone(rooms)
    expect(boardTitle(needing.length)).toBe('Four rooms need someone')
    expect(boardTitle(1)).toBe('One room needs someone')
    expect(boardTitle(0)).toBe('No room needs anyone')
    expect(boardTitle(16)).toBe('16 rooms need someone')
    expect(boardLead(rooms)).toBe(
      'Of 8: two over the limit, one silent, one sensor suspect. One more is near the limit.',
    )
    expect(boardLead([rooms[6]!])).toBe('One room, all below the limit and heard.')
  })

  test('an unusual level comes first, then over the limit the longest, then silent, then suspect; awaited sensors do not call', () => {
    const unusual = room('3.01', { state: 'in range', co2Ppm: 5200, unusual: true })
    expect(needSomeone([...rooms, unusual]).map(({ number }) => number)).toEqual([
      '3.01',
      '2.02',
      '1.02',
      '1.05',
      '2.05',
    ])
  })

  test('each state has its words', () => {
    const say = (number: string) => tileWords(rooms.find((each) => each.number === number)!, NOW).say
    expect(say('2.02')).toEqual(['over the limit for 42 min'])
    expect(say('1.05')).toEqual(['no signal for 97 min'])
    expect(say('2.04')).toEqual(['↑ near the limit', 'over in 14 min'])
    expect(say('2.06')).toEqual(['↓ falling', 'empty for 32 min'])
    expect(say('G.02')).toEqual(['awaiting first reading'])
    expect(tileWords({ ...rooms[0]!, live: null, hidden: true }, NOW).number).toBe('')
    expect(whyWords(room('3.01', { co2Ppm: 5200, unusual: true }), NOW, 'UTC')).toContain(
      'follow the site’s emergency procedure',
    )
    const drifting = { ...rooms[3]!, suspectReason: 'drifts against its fellows: −67 ppm in 42 nights' }
    expect(whyWords(drifting, NOW, 'UTC')).toBe(
      'Drifts against its fellows: −67 ppm in 42 nights. Give it the fresh-air check, or swap it.',
    )
    expect(whyWords(rooms[1]!, NOW, 'UTC')).toBe(
      'Rising 9 ppm a minute. Its ventilation supports 9 people, and it is meant for 12.',
    )
  })

  test('the age of the last reading and the limit', () => {
    expect(lastReadingWords(NOW - 6, NOW, 'UTC')).toBe('Last reading 6 seconds ago')
    expect(lastReadingWords(NOW - 600, NOW, 'UTC')).toBe('Last reading 10 minutes ago')
    expect(lastReadingWords(null, NOW, 'UTC')).toBe('No reading yet')
    expect(limitWords(rooms)).toBe('limit 1238 ppm')
    expect(limitWords([...rooms, { ...rooms[0]!, limitPpm: 1000 }])).toBe('limits 1000 to 1238 ppm')
  })
})

describe('the filter in the address', () => {
  test('is read back as it was written, and nonsense counts as not given', () => {
    const filter = { floor: 2, tenancy: 'Weir Learning', show: 'falling', tiles: 'close' } as const
    const { searchParams } = new URL(boardAddress(filter), 'http://x')
    expect(boardFilterOf(Object.fromEntries(searchParams))).toEqual(filter)
    expect(boardFilterOf({ floor: 'x', show: 'y', tiles: 'z' })).toEqual({
      floor: null,
      tenancy: null,
      show: 'every',
      tiles: null,
    })
  })

  test('counts each choice, and close tiles begin at 41 rooms unless chosen', () => {
    const filter = boardFilterOf({})
    const shows = boardFilters(boardOf(rooms), rooms, filter).find(({ label }) => label === 'Show')
    expect(shows?.choices.map((choice) => ('count' in choice ? choice.count : null))).toEqual([8, 3, 1, 3])
    expect(rooms.filter((each) => isShown(each, 'trouble')).map(({ number }) => number)).toEqual([
      '1.05',
      '2.05',
      'G.02',
    ])
    expect([isClose(filter, 40), isClose(filter, 41), isClose({ ...filter, tiles: 'full' }, 120)]).toEqual([
      false,
      true,
      false,
    ])
  })
})

describe('changes of a board', () => {
  const before = boardOf(rooms)

  test('hold only what differs, and lie over the board in its order', () => {
    const after = boardOf(
      rooms.map((each) => (each.number === 'G.01' ? room('G.01', { co2Ppm: 540 }) : each)),
    )
    const change = changeBetween(before, after)
    expect(change?.rooms.map(({ number }) => number)).toEqual(['G.01'])
    const shown = applyChange(before, boardChangeSchema.parse(JSON.parse(JSON.stringify(change))))
    expect(shown.rooms).toEqual(boardSchema.parse(after).rooms)
    expect(changeBetween(after, after)).toBeNull()
  })

  test('another name or place makes another plan', () => {
    expect(samePlan(before, boardOf(rooms.slice(1)))).toBe(false)
    expect(samePlan(before, boardOf(rooms.map((each) => ({ ...each, live: null }))))).toBe(true)
  })

  test('a reader gets the rooms of their scope alone, and no live value that is not theirs', () => {
    const visible = new Map([
      ['id-2.02', { live: true }],
      ['id-2.05', { live: false }],
    ])
    const seen = visibleRooms(rooms, visible)
    expect(seen.map(({ number, hidden }) => [number, hidden])).toEqual([
      ['2.02', false],
      ['2.05', true],
    ])
    expect(JSON.stringify(seen[1])).not.toContain('371')
    const change = { atS: NOW, outdoor: before.outdoor, lastReadingS: NOW, rooms: [rooms[6]!] }
    expect(visibleChange(change, visible)).toBeNull()
  })

  test('a room that the board does not hold is not added by a change', () => {
    const change = { atS: NOW + 1, outdoor: before.outdoor, lastReadingS: NOW, rooms: [room('9.99', {})] }
    expect(applyChange(before, change).rooms).toHaveLength(rooms.length)
  })
})

test('the wait before listening again doubles, is spread, and ends at half a minute', () => {
  const longest = [1, 2, 3, 8, 40].map((failures) => waitBeforeTry(failures, () => 1))
  expect(longest).toEqual([250, 500, 1000, 30_000, 30_000])
  expect(waitBeforeTry(3, () => 0)).toBe(500)
})

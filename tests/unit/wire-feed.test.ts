import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import {
  FEED_QUANTITIES,
  type FeedMapping,
  feedMappingSchema,
  isTopicFilter,
  mapFeedMessage,
} from '@/lib/wire/feed'
import { atPointer, isJsonPointer } from '@/lib/wire/json-pointer'

const nowMs = Date.UTC(2026, 2, 2, 7, 31)

describe('JSON Pointer', () => {
  // RFC 6901 §5: the document and every example
  const document = {
    foo: ['bar', 'baz'],
    '': 0,
    'a/b': 1,
    'c%d': 2,
    'e^f': 3,
    'g|h': 4,
    'i\\j': 5,
    'k"l': 6,
    ' ': 7,
    'm~n': 8,
  }
  it.each([
    ['', document],
    ['/foo', ['bar', 'baz']],
    ['/foo/0', 'bar'],
    ['/', 0],
    ['/a~1b', 1],
    ['/c%d', 2],
    ['/e^f', 3],
    ['/g|h', 4],
    ['/i\\j', 5],
    ['/k"l', 6],
    ['/ ', 7],
    ['/m~0n', 8],
  ])('%j finds what RFC 6901 says', (pointer, expected) => {
    expect(isJsonPointer(pointer)).toBe(true)
    expect(atPointer(document, pointer)).toEqual(expected)
  })
  it.each([
    '/foo/2',
    '/foo/01',
    '/foo/-',
    '/foo/-1',
    '/foo/length',
    '/nothing/below',
    '/toString',
    '/constructor/name',
  ])('%j finds nothing', (pointer) => expect(atPointer(document, pointer)).toBeUndefined())
  it('unescapes ~1 before ~0, so that ~01 is ~1', () => {
    expect(atPointer({ '~1': 1, '/': 2 }, '/~01')).toBe(1)
  })
  it.each(['foo', '/a~', '/a~2b', '#/foo'])('%j is none', (text) => expect(isJsonPointer(text)).toBe(false))
  it('finds every value where its own path leads', () => {
    fc.assert(
      fc.property(fc.array(fc.string(), { maxLength: 5 }), fc.jsonValue(), (tokens, value) => {
        const nested = tokens.reduceRight<unknown>(
          (inner, token) => Object.fromEntries([[token, inner]]),
          value,
        )
        const pointer = tokens
          .map((token) => `/${token.replaceAll('~', '~0').replaceAll('/', '~1')}`)
          .join('')
        expect(isJsonPointer(pointer)).toBe(true)
        expect(atPointer(nested, pointer)).toEqual(value)
      }),
    )
  })
})

describe('topic filters', () => {
  it.each(['#', 'a/#', '+/b', 'a/+/c', '/', 'plant/Room 1/up'])('%j is one', (filter) =>
    expect(isTopicFilter(filter)).toBe(true),
  )
  it.each(['', 'a#', '#/a', 'a+/b', '$share/g/a', 'a\u0000b'])('%j is none', (filter) =>
    expect(isTopicFilter(filter)).toBe(false),
  )
})

const plain: FeedMapping = {
  items: null,
  device: { topicLevel: 3 },
  time: { pointer: '/time', format: 'any' },
  co2: { pointer: '/values/co2', unit: 'ppm', scale: 1 },
  temp: { pointer: '/values/t', unit: '°C', scale: 0.1 },
  rh: { pointer: '/values/rh', unit: 'fraction', scale: 1 },
  battery: null,
  rssi: null,
}
const message = (payload: unknown, topic = 'plant/up/dev-7') => ({
  topic,
  payload: Buffer.from(typeof payload === 'string' ? payload : JSON.stringify(payload)),
  held: false,
})

describe('a feed’s message', () => {
  it('becomes a reading: device of the topic, quantities of the payload in our units', () => {
    const mapped = mapFeedMessage(
      plain,
      message({ time: '2026-03-02T07:30:00Z', values: { co2: '812', t: 214, rh: 0.385 }, other: [1] }),
      nowMs,
    )
    expect(mapped.refusals).toEqual([])
    expect(mapped.readings).toEqual([
      {
        deviceId: 'dev-7',
        reading: {
          atMs: Date.UTC(2026, 2, 2, 7, 30),
          co2Ppm: 812,
          tempC: 21.4,
          rhPct: 38.5,
          batteryPct: null,
          rssiDbm: null,
          marked: false,
        },
      },
    ])
  })
  it('with a list gives one reading an item, and refuses the bad ones by number', () => {
    const mapping: FeedMapping = {
      ...plain,
      items: '/list',
      device: { pointer: '/id' },
      time: { pointer: '/ms', format: 'milliseconds' },
      co2: { pointer: '/pct', unit: 'percent by volume', scale: 1 },
      temp: null,
      rh: null,
    }
    const list = [
      { id: 'a', ms: nowMs - 1000, pct: 0.0612 },
      { id: 17, ms: nowMs - 2000, pct: 0.05 },
      { id: 'no/slash', ms: nowMs, pct: 0.05 },
      { id: 'b', ms: nowMs, pct: {} },
      { id: 'c', ms: nowMs + 3_600_000, pct: 0.05 },
    ]
    const mapped = mapFeedMessage(mapping, message({ list }), nowMs)
    expect(mapped.readings.map(({ deviceId, reading }) => [deviceId, reading.atMs, reading.co2Ppm])).toEqual([
      ['a', nowMs - 1000, 612],
      ['17', nowMs - 2000, 500],
    ])
    expect(mapped.refusals).toMatchObject([
      { reason: 'bad-payload', deviceId: null, detail: expect.stringContaining('item 3: /id is "no/slash"') },
      { reason: 'wrong-type', deviceId: 'b' },
      { reason: 'time-in-future', deviceId: 'c' },
    ])
  })
  it('takes seconds, milliseconds and ISO 8601 as it is told, and no other', () => {
    const at = (format: 'iso' | 'seconds' | 'milliseconds', time: unknown) => {
      const mapped = mapFeedMessage(
        { ...plain, time: { pointer: '/time', format } },
        message({ time, values: { co2: 500 } }),
        nowMs,
      )
      return mapped.readings[0]?.reading.atMs ?? mapped.refusals[0]?.reason
    }
    expect(at('seconds', nowMs / 1000)).toBe(nowMs)
    expect(at('milliseconds', String(nowMs))).toBe(nowMs)
    expect(at('iso', '2026-03-02T08:31:00+01:00')).toBe(nowMs)
    expect(at('iso', nowMs)).toBe('bad-time')
    expect(at('seconds', 'yesterday')).toBe('bad-time')
  })
  it('without a time is taken at its arrival, unless the broker held it', () => {
    const untimed = { ...plain, time: null }
    const one = message({ values: { co2: 500 } })
    expect(mapFeedMessage(untimed, one, nowMs + 123).readings[0]?.reading.atMs).toBe(nowMs)
    expect(mapFeedMessage(untimed, { ...one, held: true }, nowMs).refusals).toMatchObject([
      { reason: 'bad-time' },
    ])
  })
  it.each([
    ['no JSON', '{', 'bad-json'],
    ['no list', { list: {} }, 'bad-payload'],
    ['no device', [], 'bad-payload'],
    ['no CO2', { time: null, values: {} }, 'missing-co2'],
    ['too large', `"${'x'.repeat(300_000)}"`, 'too-large'],
  ])('with %s is refused', (name, payload, reason) => {
    const mapping = name === 'no list' ? { ...plain, items: '/list' } : plain
    const topic = name === 'no device' ? 'plant' : undefined
    expect(mapFeedMessage(mapping, message(payload, topic), nowMs)).toMatchObject({
      readings: [],
      refusals: [{ reason }],
    })
  })
  it('never throws, whatever it holds', () => {
    fc.assert(
      fc.property(
        fc.oneof(
          fc.uint8Array(),
          fc.json().map((text) => Buffer.from(text)),
        ),
        fc.string(),
        (payload, topic) => {
          const mapped = mapFeedMessage(plain, { topic, payload, held: false }, nowMs)
          expect(mapped.readings.length + mapped.refusals.length).toBeGreaterThan(0)
        },
      ),
    )
  })
  it('has each unit right', () => {
    const celsius = (unit: string, value: number) =>
      mapFeedMessage(
        { ...plain, temp: { pointer: '/values/t', unit, scale: 1 } },
        message({ values: { co2: 500, t: value } }),
        nowMs,
      ).readings[0]?.reading.tempC
    expect(celsius('°F', 70)).toBeCloseTo(21.111, 3)
    expect(celsius('K', 294.15)).toBeCloseTo(21, 9)
  })
})

it('a mapping is checked before it is stored', () => {
  expect(feedMappingSchema.safeParse(plain).success).toBe(true)
  for (const quantity of FEED_QUANTITIES) {
    const bad = { ...plain, [quantity]: { pointer: 'no slash', unit: 'ppm', scale: 0 } }
    expect(feedMappingSchema.safeParse(bad).success).toBe(false)
  }
})

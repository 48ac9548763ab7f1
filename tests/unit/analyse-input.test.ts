import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import path from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import { lineOfPath } from '@/ingest/analyse/json-lines'
import { parseOptions } from '@/ingest/analyse/options'
import { InputError } from '@/ingest/analyse/problems'
import { readRoomsFile } from '@/ingest/analyse/rooms-file'
import { parseCo2, readRows } from '@/ingest/analyse/rows'
import { Spill } from '@/ingest/analyse/spill'
import { parseTimestamp } from '@/ingest/analyse/timestamp'

const folder = mkdtempSync(path.join(tmpdir(), 'analyse-test-'))
afterAll(() => rmSync(folder, { recursive: true }))

function file(name: string, text: string): string {
  const full = path.join(folder, name)
  writeFileSync(full, text)
  return full
}

function problemsOf(action: () => unknown): readonly string[] {
  try {
    action()
  } catch (error) {
    if (error instanceof InputError) return error.problems
    throw error
  }
  return []
}

describe('command line', () => {
  it('takes rooms, readings, outdoor and out', () => {
    expect(parseOptions(['--rooms', 'a', '--readings', 'b', '--outdoor', 'c', '--out', 'd'])).toEqual({
      kind: 'decays',
      rooms: 'a',
      readings: 'b',
      outdoor: 'c',
      out: 'd',
    })
    expect(parseOptions(['--tracer', 't.json'])).toEqual({ kind: 'tracer', tracer: 't.json' })
  })

  it.each([
    [['--rooms', 'a'], /--readings is missing/],
    [['--readings', 'a'], /--rooms is missing/],
    [['--tracer', 'a', '--readings', 'b'], /instead of --readings/],
    [['--nonsense'], /nonsense/],
  ])('says what is wrong with %j', (words, message) => {
    expect(() => parseOptions(words)).toThrow(message)
  })
})

describe('timestamps', () => {
  it.each([
    ['2026-03-02T07:31:00Z', 1772436660],
    ['2026-03-02T08:31:00+01:00', 1772436660],
    ['2026-03-02T02:01:00-0530', 1772436660],
    ['2026-03-02 07:31Z', 1772436660],
    ['2026-03-02T07:31:00.500Z', 1772436660.5],
    ['2024-02-29T00:00:00Z', 1709164800],
  ])('%s', (text, epochS) => {
    expect(parseTimestamp(text)).toBe(epochS)
  })

  it.each([
    '2026-03-02T07:31:00',
    '2026-02-30T00:00:00Z',
    '2026-13-01T00:00:00Z',
    '2026-03-02T25:00:00Z',
    'yesterday',
    '',
  ])('refuses "%s"', (text) => {
    expect(parseTimestamp(text)).toBeNaN()
  })
})

describe('readings', () => {
  it('takes numbers from 1 to 50 000 only', () => {
    expect(parseCo2(' 812.5 ')).toBe(812.5)
    for (const bad of ['', 'x', 'NaN', '0', '50001', '-5', undefined])
      expect(typeof parseCo2(bad)).toBe('string')
  })

  const read = async (text: string) => {
    const taken: string[][] = []
    const said: string[] = []
    const take = (cells: string[]) => {
      if (cells[1] === 'bad') return 'expected good'
      taken.push(cells)
      return null
    }
    const rows = await readRows(file('rows.csv', text), ['room', 'value'], take, (line) => said.push(line))
    return { taken, said, rows }
  }

  it('reads any column order, quotes, carriage returns, a byte order mark and blank lines', async () => {
    const { taken, rows } = await read('\uFEFFvalue,room\r\n1,"a,b"\r\n\r\n2,c')
    expect(rows).toBe(2)
    expect(taken).toEqual([
      ['a,b', '1'],
      ['c', '2'],
    ])
  })

  it('names file, line and what was expected; lists twenty; goes on with the rest', async () => {
    const lines = [
      'room,value',
      ...Array.from({ length: 25 }, () => 'a,bad'),
      ...Array.from({ length: 30 }, () => 'a,1'),
    ]
    const { taken, said } = await read(lines.join('\n'))
    expect(taken).toHaveLength(30)
    expect(said[0]).toMatch(/rows\.csv:2: expected good$/)
    expect(said.filter((line) => line.endsWith('expected good'))).toHaveLength(20)
    expect(said.at(-1)).toMatch(/25 of 55 rows were left out/)
  })

  it('refuses a file when more than half of it is bad, or its header lacks a column', async () => {
    await expect(read('room,value\na,bad\na,bad\na,1')).rejects.toThrow(/2 of 3 rows are bad/)
    await expect(read('room,ppm\na,1')).rejects.toThrow(/rows\.csv:1: expected the header room,value/)
    await expect(read('')).rejects.toThrow(/empty/)
  })
})

describe('rooms.json', () => {
  const rooms = (text: string) => readRoomsFile(file('rooms.json', text))

  it('takes the smallest file', () => {
    const { timeZone, rooms: list } = rooms(
      '{ "time_zone": "Europe/Lisbon", "rooms": [ { "id": "r01", "volume_m3": 75.0 } ] }',
    )
    expect(timeZone).toBe('Europe/Lisbon')
    expect(list[0]).toMatchObject({ id: 'r01', volumeM3: 75 })
  })

  it('names the line of every problem', () => {
    const text =
      '{\n "time_zone": "Nowhere/At_All",\n "rooms": [\n  { "id": "a", "volume_m3": -1 },\n  { "id": "b" }\n ]\n}'
    const problems = problemsOf(() => rooms(text))
    expect(problems).toHaveLength(3)
    expect(problems[0]).toMatch(/rooms\.json:2: time_zone: expected an IANA time zone/)
    expect(problems[1]).toMatch(/rooms\.json:4: rooms\.0\.volume_m3: expected volume_m3 above 0/)
    expect(problems[2]).toMatch(/rooms\.json:5: rooms\.1\.volume_m3: expected volume_m3 as a number/)
  })

  it('refuses doubled rooms, unknown neighbours and broken JSON', () => {
    const double =
      '{"time_zone":"UTC","rooms":[{"id":"a","volume_m3":1},{"id":"a","volume_m3":1,"neighbour":"zz"}]}'
    expect(problemsOf(() => rooms(double))).toHaveLength(2)
    expect(problemsOf(() => rooms('{\n "rooms": [\n'))[0]).toMatch(/rooms\.json:\d+: not valid JSON/)
    expect(problemsOf(() => readRoomsFile(path.join(folder, 'missing.json')))[0]).toMatch(/cannot be read/)
  })

  it('finds lines through strings, escapes and nesting', () => {
    const text = '{\n "a": "x\\"{[",\n "b": [\n  1,\n  { "c": true }\n ]\n}'
    expect(lineOfPath(text, ['b', 1, 'c'])).toBe(5)
    expect(lineOfPath(text, ['b', 7])).toBe(3)
  })
})

describe('spill', () => {
  it('gives back every series in time order, across buckets, doubles kept, and cleans up', () => {
    const spill = new Spill()
    const start = 1_772_409_600
    for (let i = 0; i < 9000; i++) {
      const minute = (i * 4801) % 9000
      spill.add(i % 2, start + minute * 60, minute)
    }
    spill.add(0, start, 0)
    const even = spill.read(0, start, start + 9000 * 60)
    const odd = spill.read(1, start + 3600, start + 7200)
    expect(even.timeS.length + spill.read(1, start, start + 9000 * 60).timeS.length).toBe(9001)
    expect(even.timeS.every((t, i) => i === 0 || t >= even.timeS[i - 1]!)).toBe(true)
    expect(odd.timeS.every((t) => t >= start + 3600 && t <= start + 7200)).toBe(true)
    expect(even.co2Ppm.every((value, i) => even.timeS[i] === start + value * 60)).toBe(true)
    expect(spill.mayHold(start - 10 * 86_400, start - 5 * 86_400)).toBe(false)
    spill.close()
  })
})

/** The command as outsiders start it: a process with files, an exit code and two streams. */
import { spawnSync } from 'node:child_process'
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import path from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import { generateRoom } from '../science/decay/support/rooms'

const folder = mkdtempSync(path.join(tmpdir(), 'analyse-command-'))
afterAll(() => rmSync(folder, { recursive: true }))
const at = (name: string) => path.join(folder, name)

function analyse(...words: string[]) {
  const done = spawnSync(process.execPath, ['--import', 'tsx', 'ingest/analyse/main.ts', ...words], {
    encoding: 'utf8',
  })
  return { code: done.status, out: done.stdout, err: done.stderr.split('\n').filter(Boolean) }
}

const room = generateRoom('clean', 2, { days: 2 })
const rows = Array.from(room.timeS, (t, i) => `r01,${new Date(t * 1000).toISOString()},${room.co2Ppm[i]}`)
writeFileSync(
  at('rooms.json'),
  '{ "time_zone": "Europe/Lisbon", "rooms": [ { "id": "r01", "volume_m3": 75 } ] }',
)
writeFileSync(at('readings.csv'), ['room,timestamp,co2_ppm', ...rows].join('\n'))

const KEYS = [
  'room',
  'night',
  'start',
  'end',
  'kind',
  'ach',
  'ach_low',
  'ach_high',
  'outdoor_ach_low',
  'outdoor_ach_high',
  'background_ppm',
  'start_ppm',
  'mean_age_min',
  'mode',
  'mode_from',
  'quality',
  'reasons',
  'rate_change_at',
  'rate_change_low',
  'rate_change_high',
]

describe('analyse', { timeout: 120_000 }, () => {
  it('writes one array by room and start, every promised field in each entry, and is the same in any row order', () => {
    const first = analyse(
      '--rooms',
      at('rooms.json'),
      '--readings',
      at('readings.csv'),
      '--out',
      at('a.json'),
    )
    expect(first).toMatchObject({ code: 0, out: '', err: [] })
    const text = readFileSync(at('a.json'), 'utf8')
    const entries = JSON.parse(text) as Record<string, unknown>[]
    expect(entries.length).toBeGreaterThan(1)
    for (const entry of entries) expect(Object.keys(entry)).toEqual(KEYS)
    const starts = entries.map((entry) => String(entry.start))
    expect(starts).toEqual([...starts].sort())
    const given = entries.filter((entry) => entry.quality !== 'refused' && entry.kind === 'fit')
    expect(given.length).toBeGreaterThan(0)
    for (const { ach, ach_low, ach_high, mean_age_min } of given as Record<string, number>[]) {
      expect(ach_low!).toBeLessThan(ach!)
      expect(ach_high!).toBeGreaterThan(ach!)
      expect(mean_age_min!).toBeCloseTo(60 / ach!, 1)
    }
    writeFileSync(
      at('shuffled.csv'),
      ['room,timestamp,co2_ppm', ...rows.reverse(), ...rows.slice(0, 50)].join('\r\n'),
    )
    const second = analyse('--rooms', at('rooms.json'), '--readings', at('shuffled.csv'))
    expect(second.code).toBe(0)
    expect(second.out).toBe(text)
  })

  it('goes on past bad rows and names them', () => {
    const bad = [
      'r02,2026-03-02T10:00:00Z,500',
      'r01,2026-03-02T10:00:00,500',
      'r01,2026-03-02T10:00:00Z,much',
    ]
    writeFileSync(at('bad.csv'), ['room,timestamp,co2_ppm', ...bad, ...rows].join('\n'))
    const run = analyse('--rooms', at('rooms.json'), '--readings', at('bad.csv'))
    expect(run.code).toBe(0)
    expect(run.err).toHaveLength(4)
    expect(run.err[0]).toMatch(/bad\.csv:2: expected a room of rooms\.json, not "r02"/)
    expect(run.err[1]).toMatch(/bad\.csv:3: expected timestamp in ISO 8601 with offset or Z/)
    expect(run.err[2]).toMatch(/bad\.csv:4: expected co2_ppm as a number/)
  })

  it('ends with 2 and says why, with nothing on standard output', () => {
    for (const [words, message] of [
      [[], /--rooms is missing/],
      [['--rooms', at('none.json'), '--readings', at('readings.csv')], /none\.json:1: cannot be read/],
      [['--rooms', at('rooms.json'), '--readings', at('none.csv')], /none\.csv:1: cannot be read/],
      [
        ['--rooms', at('rooms.json'), '--readings', at('readings.csv'), '--out', at('no/such/x.json')],
        /cannot be written/,
      ],
    ] as const) {
      const run = analyse(...words)
      expect(run.code).toBe(2)
      expect(run.out).toBe('')
      expect(run.err[0]).toMatch(message)
    }
  })
})

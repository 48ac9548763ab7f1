import fs from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { exportDemo } from '@/ingest/simulator/export-files'
import { askedOf } from '@/ingest/simulator/export-options'
import { sallowMill } from '@/ingest/simulator/scenario'
import { makeWorld } from '@/ingest/simulator/world'

let dir: string
beforeAll(() => {
  dir = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-export-'))
})
afterAll(() => fs.rmSync(dir, { recursive: true, force: true }))

const firstStartS = Date.parse('2026-10-26T00:00:00Z') / 1000
const read = (name: string) => fs.readFileSync(path.join(dir, name), 'utf8')

describe('export', () => {
  it('writes the files that the analysis reads, the hour that summer time repeats told apart by Z', async () => {
    const world = makeWorld(sallowMill, { seed: 1, firstStartS, historyS: 86400 })
    const counts = await exportDemo(world, dir, firstStartS)
    const rooms = JSON.parse(read('rooms.json'))
    expect(rooms.time_zone).toBe('Europe/London')
    expect(rooms.rooms).toHaveLength(26)
    expect(rooms.rooms.find((r: { id: string }) => r.id === '203-treadle')).toMatchObject({
      volume_m3: 78,
      floor_area_m2: 26,
      persons_max: 9,
      neighbour: '200-second-landing',
      air_handler: 'AH-3',
      air: 'outdoor',
      supply_hours: [{ days: [1, 2, 3, 4, 5], from: '07:00', to: '19:00' }],
      sensor: { accuracy_ppm: 30, accuracy_pct: 3, resolution_ppm: 1, range_max_ppm: 5000 },
    })
    const airs = new Set(rooms.rooms.map((r: { air: string }) => r.air))
    expect(airs).toEqual(new Set(['outdoor', 'recirculating', 'natural']))

    const [head, ...lines] = read('readings.csv').trimEnd().split('\n')
    expect(head).toBe('room,timestamp,co2_ppm')
    expect(lines).toHaveLength(counts.readings)
    expect(lines.every((l) => /^[a-z0-9-]+,\d{4}-\d\d-\d\dT\d\d:\d\d:\d\dZ,\d+$/.test(l))).toBe(true)
    expect(new Set(lines.map((l) => l.split(',').slice(0, 2).join())).size).toBe(lines.length)
    expect(read('outdoor.csv').split('\n')[0]).toBe('timestamp,co2_ppm')
    expect(counts.outdoor).toBeGreaterThan(1380)
    expect(JSON.parse(read('truth.json')).rooms).toHaveLength(27)
  })

  it('reads its options, with the demo that stands as default', () => {
    const birth = { seed: 4, firstStart: '2026-11-02T09:30:00.000Z' }
    const firstStartS = Date.parse(birth.firstStart) / 1000
    const now = Date.parse('2026-12-01T14:05:00Z')
    expect(askedOf(['--out', dir], birth, now)).toMatchObject({ seed: 4, firstStartS, untilS: firstStartS })
    const fresh = askedOf(['--out', dir, '--weeks', '2', '--without', 'cleaners,openDoor'], undefined, now)
    expect(fresh).toMatchObject({
      untilS: Date.parse('2026-12-01T00:00:00Z') / 1000,
      historyS: 14 * 86400,
      stories: { cleaners: false, openDoor: false },
    })
  })

  it('answers a wrong command with what was expected', () => {
    const asked =
      (...args: string[]) =>
      () =>
        askedOf(args, undefined, Date.parse('2026-12-01T14:05:00Z'))
    expect(asked('--weeks', '2')).toThrow('--out is missing: name the folder to write to')
    expect(asked('--out', dir, '--without', 'halfSuply')).toThrow(/halfSuply: expected some of halfSupply/)
    expect(asked('--out', dir, '--until', '2026-12-01T10:00')).toThrow(/expected ISO 8601 with offset or Z/)
    expect(asked('--out', dir, '--until', '2025-12-01T10:00Z')).toThrow(/before the first reading/)
    expect(asked('--out', dir, '--weeks', '0')).toThrow(/--weeks 0: expected a whole number from 1 to 52/)
    expect(asked('--out', dir, '--nope')).toThrow(/nope/)
  })
})

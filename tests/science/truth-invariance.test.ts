/**
 * What must not matter to the analyse command, or matter only as physics says: the order of rows, repeated rows, how a time is written,
 * who else is in the file, a constant offset of all sensors, a sensor's gain.
 */
import { spawnSync } from 'node:child_process'
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Answer } from '../support/truth/answer'
import { makeBuilding, type TruthBuilding } from '../support/truth/building'
import { writeBuilding } from '../support/truth/files'
import { randomFrom } from '../support/truth/random'
import type { Reading } from '../support/truth/sensor'

const folder = mkdtempSync(join(tmpdir(), 'ebbmark-invariance-'))
afterAll(() => rmSync(folder, { recursive: true, force: true }))

const order = { className: 'clean', seed: 41, part: 0, rooms: 3, days: 3, outdoor: true }
const building = makeBuilding(order)
let plain: Answer[] = []

let runs = 0
/** Runs the command on a building; `rewrite` may change the lines of readings.csv first. */
function analyse(of: TruthBuilding, rewrite: (lines: string[]) => string[] = (lines) => lines): Answer[] {
  const files = writeBuilding(of, join(folder, String(runs++)))
  const [head, ...lines] = readFileSync(files.readings, 'utf8').trimEnd().split('\n')
  writeFileSync(files.readings, `${[head, ...rewrite(lines)].join('\n')}\n`)
  const args = [
    '--import',
    'tsx',
    'ingest/analyse/main.ts',
    '--rooms',
    files.rooms,
    '--readings',
    files.readings,
  ]
  if (files.outdoor) args.push('--outdoor', files.outdoor)
  const run = spawnSync(process.execPath, [...args, '--out', files.out], { encoding: 'utf8' })
  expect(run.status, run.stderr).toBe(0)
  return JSON.parse(readFileSync(files.out, 'utf8')) as Answer[]
}

const altered = (change: (reading: Reading) => number): TruthBuilding => {
  const readings = (list: readonly Reading[]) => list.map((r) => ({ ...r, ppm: change(r) }))
  return {
    ...building,
    rooms: building.rooms.map((room) => ({ ...room, readings: readings(room.readings) })),
    outdoor: building.outdoor && readings(building.outdoor),
  }
}

/** Largest relative difference of the accepted rates that both runs give for about the same window. */
function rateDifference(a: readonly Answer[], b: readonly Answer[]): { most: number; pairs: number } {
  let most = 0
  let pairs = 0
  for (const one of a.filter((x) => x.quality === 'accepted' && x.ach !== null)) {
    const near = (x: Answer) => Math.abs(Date.parse(x.start) - Date.parse(one.start)) < 1_200_000
    const other = b.find((x) => x.room === one.room && x.ach !== null && near(x))
    if (!other) continue
    pairs++
    most = Math.max(most, Math.abs(other.ach! / one.ach! - 1))
  }
  return { most, pairs }
}

beforeAll(() => {
  plain = analyse(building)
}, 60_000)

describe('the analyse command', () => {
  it('has something to compare', () => {
    expect(plain.filter((a) => a.quality === 'accepted').length).toBeGreaterThanOrEqual(6)
  })

  it('does not care about the order of rows, nor about repeated rows', () => {
    const random = randomFrom('shuffle')
    const shuffled = analyse(building, (lines) => {
      const all = [...lines, ...lines.filter(() => random.chance(0.05))]
      return all
        .map((line) => ({ line, key: random.uniform(0, 1) }))
        .sort((a, b) => a.key - b.key)
        .map(({ line }) => line)
    })
    expect(shuffled).toEqual(plain)
  }, 60_000)

  it('reads a time with an offset as the same instant', () => {
    const offset = analyse(building, (lines) =>
      lines.map((line) => {
        const [room, time, ppm] = line.split(',')
        const there = new Date(Date.parse(time!) + 5.5 * 3_600_000).toISOString().slice(0, 19)
        return `${room},${there}+05:30,${ppm}`
      }),
    )
    expect(offset).toEqual(plain)
  }, 60_000)

  it('says the same of a room when unrelated rooms are left out', () => {
    const alone = analyse({ ...building, rooms: building.rooms.slice(1, 2) })
    expect(alone).toEqual(plain.filter((a) => a.room === building.rooms[1]!.id))
  }, 60_000)

  it('finds the same rates when every sensor reads 20 ppm higher', () => {
    const { most, pairs } = rateDifference(plain, analyse(altered((r) => r.ppm + 20)))
    expect(pairs).toBeGreaterThanOrEqual(6)
    expect(most).toBeLessThan(0.03)
  }, 60_000)

  it('finds the same rates when every sensor reads 4 % high: gain cancels where one sensor gives level and background', () => {
    const { most, pairs } = rateDifference(plain, analyse(altered((r) => Number((r.ppm * 1.04).toFixed(1)))))
    expect(pairs).toBeGreaterThanOrEqual(6)
    expect(most).toBeLessThan(0.03)
  }, 60_000)

  it('writes the same file twice', () => {
    expect(analyse(building)).toEqual(plain)
  }, 60_000)
})

import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import path from 'node:path'
import { afterAll, afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { runTracer } from '@/ingest/analyse/tracer'
import { bypass, mixing, sampleShare } from './support/rooms-with-ages'

const folder = mkdtempSync(path.join(tmpdir(), 'tracer-'))
afterAll(() => rmSync(folder, { recursive: true }))

let out = ''
let err = ''
beforeEach(() => {
  out = ''
  err = ''
  vi.spyOn(process.stdout, 'write').mockImplementation((text) => {
    out += String(text)
    return true
  })
  vi.spyOn(process.stderr, 'write').mockImplementation((text) => {
    err += String(text)
    return true
  })
})
afterEach(() => vi.restoreAllMocks())

async function run(content: unknown): Promise<{ code: number; lines: string[] }> {
  const file = path.join(folder, 'test.json')
  writeFileSync(file, typeof content === 'string' ? content : JSON.stringify(content, null, 1))
  const code = await runTracer(file)
  return { code, lines: err.split('\n').filter(Boolean) }
}

const plan = { kind: 'decay' as const, nominalS: 1800, step: 0.05, length: 6, background: 420, rise: 1500 }
const good = {
  kind: 'decay',
  volume_m3: 90,
  background: 420,
  exhaust: sampleShare(mixing.exhaust, plan),
  points: { P1: sampleShare(mixing.exhaust, plan) },
}

describe('analyse --tracer', () => {
  it('prints every promised field with its limits and returns 0', async () => {
    const { code, lines } = await run(good)
    expect(code).toBe(0)
    expect(lines).toEqual([])
    const result = JSON.parse(out)
    const names = [
      'nominal_time_s',
      'room_mean_age_s',
      'effectiveness_coefficient',
      'air_change_efficiency_pct',
    ]
    expect(Object.keys(result)).toEqual([
      ...names.flatMap((name) => [name, `${name}_low`, `${name}_high`]),
      'points',
      'tail_share',
      'warnings',
    ])
    expect(Object.keys(result.points.P1)).toEqual(
      ['local_mean_age_s', 'local_index'].flatMap((name) => [name, `${name}_low`, `${name}_high`]),
    )
    expect(result.nominal_time_s / 1800).toBeCloseTo(1, 2)
    expect(result.air_change_efficiency_pct).toBeCloseTo(50, 0)
    expect(result.warnings).toEqual([])
  })
  it('warns in the result and in a sentence on standard error', async () => {
    const samples = sampleShare(bypass(0.2).exhaust, plan).filter(([t]) => t > 0)
    const { code, lines } = await run({ ...good, exhaust: samples, points: {} })
    expect(code).toBe(0)
    expect(JSON.parse(out).warnings).toContain('initial-after-step')
    expect(lines.some((line) => line.includes('initial-after-step: No sample before the step'))).toBe(true)
  })
  it('names file, line and what was expected, one line per problem, and returns 2', async () => {
    const { code, lines } = await run('{\n "kind": "fog",\n "volume_m3": 0,\n "exhaust": 7\n}')
    expect(code).toBe(2)
    expect(out).toBe('')
    expect(lines).toHaveLength(3)
    expect(lines[0]).toMatch(/test\.json:2: kind: expected kind "step-up" or "decay"/)
    expect(lines[1]).toMatch(/test\.json:3: volume_m3: expected/)
    expect(lines[2]).toMatch(/test\.json:4: exhaust: expected/)
  })
  it.each([
    ['{ "kind": }', /:1: not valid JSON/],
    [{ ...good, exhaust: [], points: {} }, /expected a record/],
    [{ ...good, exhaust: good.exhaust.slice(0, 9) }, /at least 6 samples/],
    [{ ...good, initial: 420 }, /differ from the background/],
  ])('refuses an unusable test (%#)', async (content, message) => {
    const { code, lines } = await run(content)
    expect(code).toBe(2)
    expect(lines.join('\n')).toMatch(message)
  })
  it('a file that is not there', async () => {
    expect(await runTracer(path.join(folder, 'nothing.json'))).toBe(2)
    expect(err).toMatch(/nothing\.json:1: cannot be read/)
  })
  it('bad samples never stop the good ones unless they are more than half', async () => {
    const holes = good.exhaust.map((sample, i) => (i % 4 === 3 ? [sample[0], null] : sample))
    const few = await run({ ...good, exhaust: holes })
    expect(few.code).toBe(0)
    expect(few.lines.filter((line) => line.includes('exhaust.'))).toHaveLength(20)
    expect(few.lines.some((line) => line.includes('more bad samples'))).toBe(true)
    expect(JSON.parse(out).nominal_time_s / 1800).toBeCloseTo(1, 1)
    err = ''
    const most = await run({
      ...good,
      exhaust: good.exhaust.map((sample, i) => (i % 3 === 0 ? sample : 'x')),
    })
    expect(most.code).toBe(2)
    expect(most.lines.at(-1)).toMatch(/more than half/)
  })
})

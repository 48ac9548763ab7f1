/**
 * Recovery and coverage on generated rooms with known truth (support/rooms.ts, seeded; own assumptions: no sensor lag, no mixing noise, outdoor air
 * with a daily wave, sensor offset 20 ppm). Limits are ours, a little wider than what the seeds give, so that a worse method fails.
 */
import { describe, expect, it } from 'vitest'
import { generateRoom, type RoomClass } from './support/rooms'
import { analyseDay, type Scored, scoreDecay, summarise } from './support/score'

function scored(kind: RoomClass, seeds: number, options = {}): Scored[] {
  const all: Scored[] = []
  for (let seed = 1; seed <= seeds; seed++) {
    const room = generateRoom(kind, seed, options)
    for (const decay of analyseDay(room, 1)) all.push(scoreDecay(room, decay))
  }
  return all
}

const accepted = (list: readonly Scored[]) => list.filter((s) => s.decay.quality === 'accepted')

describe('one class at a time: median error in percent of accepted figures, coverage, answered evenings', () => {
  it.each([
    ['clean', 2.5, 0.95],
    ['noisy', 5, 0.9],
    ['short', 5, 0.7],
    ['cleaners', 3.5, 0.9],
    ['shut-off', 4, 0.85],
    ['drift', 3, 0.9],
    ['outage', 5, 0.4],
  ] as const)('%s', (kind, errorPct, answered) => {
    const seeds = 24
    const list = scored(kind, seeds)
    const good = summarise(kind, seeds, accepted(list))
    expect(good.medianErrorPct).toBeLessThan(errorPct)
    expect(good.coveragePct).toBeGreaterThan(86)
    expect(good.medianHalfWidthPct).toBeLessThan(15)
    expect(good.falseAccepts).toBeLessThanOrEqual(2)
    const evenings = new Set(
      list.filter((s) => s.evening && s.decay.quality !== 'refused').map((s) => s.decay),
    )
    expect(evenings.size / seeds).toBeGreaterThan(answered)
  })
})

it('holds the truth about 95 times in 100 over all steady classes', () => {
  const all = (['clean', 'noisy', 'short', 'cleaners', 'drift'] as const).flatMap((kind) =>
    accepted(scored(kind, 24)),
  )
  const good = summarise('pooled', 120, all)
  expect(good.accepted).toBeGreaterThan(120)
  expect(good.coveragePct).toBeGreaterThan(91)
  expect(good.coveragePct).toBeLessThanOrEqual(100)
})

it.each([
  ['every 10 min', { stepS: 600 }],
  ['10-bit steps', { resolutionPpm: 5 }],
  ['autocorrelated noise', { phi: 0.8, sigmaPpm: 6 }],
])('%s: still right', (_, options) => {
  const good = summarise('clean', 20, accepted(scored('clean', 20, options)))
  expect(good.medianErrorPct).toBeLessThan(4)
  expect(good.coveragePct).toBeGreaterThan(80)
})

it('a rate that changes gives two entries that share the instant, near the true one', () => {
  let pairs = 0
  for (let seed = 1; seed <= 20; seed++) {
    const room = generateRoom('shut-off', seed)
    const decays = analyseDay(room, 1).filter((decay) => decay.quality !== 'refused')
    const stopS = room.evenings[1]!.endS
    const changes = decays.filter((decay, k) => {
      const next = decays[k + 1]
      return next && decay.rateChangeAtS !== null && next.rateChangeAtS === decay.rateChangeAtS
    })
    const before = changes.find((decay) => Math.abs(decay.startS - room.evenings[1]!.leaveS) < 2400)
    if (!before) continue
    pairs++
    expect(before.rateChangeLowS!).toBeLessThanOrEqual(before.rateChangeAtS!)
    expect(before.rateChangeHighS!).toBeGreaterThanOrEqual(before.rateChangeAtS!)
    expect(Math.abs(before.rateChangeAtS! - stopS)).toBeLessThan(1500)
  }
  expect(pairs).toBeGreaterThanOrEqual(10)
})

it('a coupled room with a measured neighbour is told as a total of which part comes from outdoors', () => {
  let told = 0
  for (let seed = 1; seed <= 12; seed++) {
    for (const decay of analyseDay(generateRoom('coupled', seed), 1)) {
      if (decay.quality === 'refused') continue
      told++
      expect(decay.reasons).toContain('neighbour-coupled')
      expect(decay.outdoorRateLowPerHour).not.toBeNull()
      expect(decay.outdoorRateLowPerHour!).toBeLessThan(decay.outdoorRateHighPerHour!)
    }
  }
  expect(told).toBeGreaterThan(8)
})

import { describe, expect, it } from 'vitest'
import { forEachReading, makeHistory } from '@/ingest/simulator/history'
import { sallowMill } from '@/ingest/simulator/scenario'
import { Simulation, type SimulationState } from '@/ingest/simulator/simulation'
import { makeWorld, type WorldOptions } from '@/ingest/simulator/world'

const firstStartS = Date.parse('2026-12-01T13:42:00Z') / 1000
const daysBefore = (days: number) => firstStartS - days * 86400
const world = (more: Partial<WorldOptions> = {}) =>
  makeWorld(sallowMill, { seed: 7, firstStartS, historyS: 4 * 86400, ...more })

type Row = [sensor: number, timeS: number, co2Ppm: number, temperatureC: number, humidityPct: number]

function readings(
  options: Partial<WorldOptions>,
  fromS: number,
  toS: number,
  state?: SimulationState,
): Row[] {
  const rows: Row[] = []
  for (const batch of makeHistory(world(options), { fromS, toS, state, batchMinutes: 500 }))
    forEachReading(batch, (...row) => rows.push(row))
  return rows
}

describe('history', () => {
  const whole = readings({}, daysBefore(3), firstStartS)

  it('gives one reading a minute of each sensor, at its own second, in whole ppm', () => {
    expect(whole.length).toBeGreaterThan(0.97 * 3 * 1440 * 30)
    expect(whole.length).toBeLessThanOrEqual(3 * 1440 * 30)
    const seconds = new Set(whole.filter(([s]) => s === 4).map(([, t]) => t % 60))
    expect(seconds.size).toBe(1)
    expect(new Set(whole.map(([s, t]) => `${s} ${t}`)).size).toBe(whole.length)
    expect(whole.every(([, , co2]) => Number.isInteger(co2) && co2 > 300 && co2 < 5000)).toBe(true)
    expect(whole.every(([, , , c, rh]) => c > -15 && c < 35 && rh >= 8 && rh <= 98)).toBe(true)
  })

  it('is the same from the same seed, and another from another', () => {
    expect(readings({}, daysBefore(3), daysBefore(2))).toEqual(whole.filter(([, t]) => t < daysBefore(2)))
    const other = readings({ seed: 8 }, daysBefore(3), daysBefore(2))
    expect(other).not.toEqual(whole.filter(([, t]) => t < daysBefore(2)))
  })

  it('goes on from a saved state exactly as if it had never stopped', () => {
    const part = new Simulation(world())
    part.runTo(Math.floor(daysBefore(1.37) / 60))
    const saved = JSON.parse(JSON.stringify(part.snapshot())) as SimulationState
    const rest = readings({}, daysBefore(1), firstStartS, saved)
    expect(rest).toEqual(whole.filter(([, t]) => t >= daysBefore(1)))
  })

  it('does not depend on a saved state that lies too late to be of use', () => {
    const late = new Simulation(world())
    late.runTo(Math.floor(daysBefore(0.5) / 60))
    const rows = readings({}, daysBefore(1), daysBefore(0.9), late.snapshot())
    expect(rows).toEqual(whole.filter(([, t]) => t >= daysBefore(1) && t < daysBefore(0.9)))
  })

  it('does not show in earlier minutes what the first start changes later', () => {
    const later = readings(
      { firstStartS: firstStartS + 90 * 60, historyS: 4 * 86400 + 90 * 60 },
      daysBefore(3),
      daysBefore(2),
    )
    expect(later).toEqual(whole.filter(([, t]) => t < daysBefore(2)))
  })
})

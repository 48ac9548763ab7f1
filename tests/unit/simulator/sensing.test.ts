import { describe, expect, it } from 'vitest'
import { LocalTime } from '@/ingest/simulator/local-time'
import { sallowMill } from '@/ingest/simulator/scenario'
import { characterOf, driftPpm, gapsBetween, reportsAt } from '@/ingest/simulator/sensing/faults'
import { indicated, laggedStep } from '@/ingest/simulator/sensing/instrument'
import { storyFor } from '@/ingest/simulator/story'

describe('a first-order instrument', () => {
  it('reaches 63.2 % of a step after one time constant', () => {
    expect(laggedStep(400, 1000, 1000, 60, 60)).toBeCloseTo(400 + 600 * (1 - Math.exp(-1)), 9)
  })

  it('follows a ramp one time constant behind, once settled', () => {
    let y = 400
    for (let k = 0; k < 100; k++) y = laggedStep(y, 400 + 2 * k * 20, 400 + 2 * (k + 1) * 20, 20, 60)
    expect(y).toBeCloseTo(400 + 2 * 2000 - 2 * 60, 6)
  })

  it('gives the same whether a step is taken whole or in parts', () => {
    const whole = laggedStep(500, 600, 700, 20, 60)
    const half = laggedStep(500, 600, 650, 10, 60)
    expect(laggedStep(half, 650, 700, 10, 60)).toBeCloseTo(whole, 9)
  })

  it('reads in steps of its resolution, within its range', () => {
    expect(indicated(812.4, 1, 5000)).toBe(812)
    expect(indicated(817, 10, 5000)).toBe(820)
    expect(indicated(6100, 1, 5000)).toBe(5000)
  })
})

describe('faults', () => {
  const firstStartS = Date.parse('2026-12-01T13:42:00Z') / 1000
  const local = new LocalTime('Europe/London')
  const story = storyFor(firstStartS, local)

  it('let the drifting sensor wander by 1.6 ppm a day from six weeks before, and no further than 110 ppm', () => {
    const { deviceId, fromS } = story.driftingSensor
    expect(driftPpm(story, deviceId, fromS)).toBeCloseTo(0, 12)
    expect(driftPpm(story, deviceId, fromS + 10 * 86400)).toBeCloseTo(-16, 9)
    expect(driftPpm(story, deviceId, fromS + 400 * 86400)).toBe(-110)
    expect(driftPpm(story, 'sm-202', fromS + 10 * 86400)).toBe(0)
    const without = storyFor(firstStartS, local, { driftingSensor: false })
    expect(driftPpm(without, deviceId, fromS + 10 * 86400)).toBe(0)
  })

  it('keep the silent sensor silent from its hour on, unless the story is left out', () => {
    const order = sallowMill.sensors.findIndex((s) => s.deviceId === story.silentSensor.deviceId)
    const sensor = sallowMill.sensors[order]!
    const character = characterOf(3, sensor, order)
    const minutes = Array.from({ length: 3000 }, (_, i) => Math.floor(story.silentSensor.fromS / 60) + i)
    const heard = (s: typeof story) =>
      minutes.filter((m) => reportsAt(3, s, sensor.deviceId, character, m)).length
    expect(heard(story)).toBe(0)
    expect(heard(storyFor(firstStartS, local, { silentSensor: false }))).toBeGreaterThan(2500)
  })

  it('lose single readings and, now and then, up to 70 minutes', () => {
    const character = characterOf(3, sallowMill.sensors[4]!, 4)
    const from = Math.floor(firstStartS / 60) - 60 * 1440
    let lost = 0
    for (let m = from; m < from + 60 * 1440; m++) if (!reportsAt(3, story, 'sm-g05', character, m)) lost += 1
    expect(lost).toBeGreaterThan(20)
    expect(lost).toBeLessThan(1200)
    for (const gap of gapsBetween(3, character, from * 60, firstStartS)) {
      expect((gap.toS! - gap.fromS) / 60).toBeGreaterThanOrEqual(8)
      expect((gap.toS! - gap.fromS) / 60).toBeLessThanOrEqual(70)
      expect(reportsAt(3, story, 'sm-g05', character, gap.fromS / 60)).toBe(false)
    }
  })
})

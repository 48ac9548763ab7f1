import { hashText, uniformAt } from '../random'
import type { SensorPlan } from '../scenario'
import type { Story } from '../story'

/** Radio gaps are drawn per block of four hours. */
const BLOCK_MIN = 240
const GAP_CHANCE = 0.006
const LOST_CHANCE = 0.0008

export type Span = { fromS: number; toS: number | null }

/** How one sensor errs, fixed for its life; drawn from the seed and its name. */
export type SensorCharacter = {
  offsetPpm: number
  gain: number
  /** second of each minute at which it reports */
  phaseS: number
  streams: { noise: number; mixing: number; lost: number; gap: number; gapAt: number; gapLength: number }
}

/** The character of a sensor: offset and gain within the model's stated accuracy, and its second of the minute. */
export function characterOf(seed: number, sensor: SensorPlan, order: number): SensorCharacter {
  const stream = (what: string) => hashText(`${sensor.deviceId}|${what}`)
  const centred = (what: string) => {
    const [a, b, c] = [0, 1, 2].map((i) => uniformAt(seed, stream(what), i)) as [number, number, number]
    return (a + b + c - 1.5) / 1.5
  }
  return {
    offsetPpm: centred('offset') * sensor.model.accuracyPpm * 0.7,
    gain: 1 + centred('gain') * (sensor.model.accuracyPct / 100) * 0.6,
    phaseS: 2 + ((order * 17) % 56),
    streams: {
      noise: stream('noise'),
      mixing: stream('mixing'),
      lost: stream('lost'),
      gap: stream('gap'),
      gapAt: stream('gap at'),
      gapLength: stream('gap length'),
    },
  }
}

/** The radio gap of a sensor's four-hour block, in epoch minutes, or null: 8 to 70 minutes, inside the block. */
export function gapOfBlock(
  seed: number,
  character: SensorCharacter,
  block: number,
): { from: number; to: number } | null {
  const { streams } = character
  if (uniformAt(seed, streams.gap, block) >= GAP_CHANCE) return null
  const length = Math.round(8 + 62 * uniformAt(seed, streams.gapLength, block))
  const from = block * BLOCK_MIN + Math.floor((BLOCK_MIN - length) * uniformAt(seed, streams.gapAt, block))
  return { from, to: from + length }
}

/** Did a sensor report in an epoch minute? Single losses and gaps are drawn; the silent sensor stays silent. */
export function reportsAt(
  seed: number,
  story: Story,
  deviceId: string,
  character: SensorCharacter,
  minute: number,
): boolean {
  const silent = story.switches.silentSensor && deviceId === story.silentSensor.deviceId
  if (silent && minute * 60 >= story.silentSensor.fromS) return false
  if (uniformAt(seed, character.streams.lost, minute) < LOST_CHANCE) return false
  const gap = gapOfBlock(seed, character, Math.floor(minute / BLOCK_MIN))
  return gap === null || minute < gap.from || minute >= gap.to
}

/** Radio gaps of a sensor between two instants, for the truth file. */
export function gapsBetween(seed: number, character: SensorCharacter, fromS: number, toS: number): Span[] {
  const spans: Span[] = []
  for (let block = Math.floor(fromS / 60 / BLOCK_MIN); block * BLOCK_MIN * 60 < toS; block++) {
    const gap = gapOfBlock(seed, character, block)
    if (gap && gap.to * 60 > fromS) spans.push({ fromS: gap.from * 60, toS: gap.to * 60 })
  }
  return spans
}

/** How far the drifting sensor has wandered at an instant, ppm; 0 for every other. */
export function driftPpm(story: Story, deviceId: string, timeS: number): number {
  const { driftingSensor, switches } = story
  if (!switches.driftingSensor || deviceId !== driftingSensor.deviceId) return 0
  const drift = (Math.max(0, timeS - driftingSensor.fromS) / 86400) * driftingSensor.ppmPerDay
  return Math.max(-driftingSensor.atMostPpm, Math.min(driftingSensor.atMostPpm, drift))
}

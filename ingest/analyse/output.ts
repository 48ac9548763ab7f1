/** Decays in the shape that the command promises. */
import { createWriteStream } from 'node:fs'
import { finished } from 'node:stream/promises'
import type { Decay } from '@/lib/air/types'
import { isoUtc } from '@/lib/time'

const rounded = (value: number | null, digits: number) =>
  value === null ? null : Number(value.toFixed(digits))
const significant = (value: number | null) => (value === null ? null : Number(value.toPrecision(6)))
const instant = (timeS: number | null) => (timeS === null ? null : isoUtc(timeS))

/** One decay as the command prints it. */
export function decayRecord(decay: Decay): Record<string, unknown> {
  return {
    room: decay.roomId,
    night: decay.night,
    start: isoUtc(decay.startS),
    end: isoUtc(decay.endS),
    kind: decay.kind,
    ach: significant(decay.airChangeRatePerHour),
    ach_low: significant(decay.airChangeRateLowPerHour),
    ach_high: significant(decay.airChangeRateHighPerHour),
    outdoor_ach_low: significant(decay.outdoorRateLowPerHour),
    outdoor_ach_high: significant(decay.outdoorRateHighPerHour),
    background_ppm: rounded(decay.background?.ppm ?? null, 1),
    start_ppm: rounded(decay.startPpm, 1),
    mean_age_min: rounded(decay.meanAgeMin, 2),
    mode: decay.mode,
    mode_from: decay.modeFrom,
    quality: decay.quality,
    reasons: decay.reasons,
    rate_change_at: instant(decay.rateChangeAtS),
    rate_change_low: instant(decay.rateChangeLowS),
    rate_change_high: instant(decay.rateChangeHighS),
  }
}

/** Writes the lines (each one JSON object) as one JSON array to a file, or to standard output. */
export async function writeResult(lines: Iterable<string>, out: string | undefined): Promise<void> {
  const stream = out === undefined ? process.stdout : createWriteStream(out)
  const failed = new Promise<never>((_, reject) => stream.once('error', reject))
  const write = (text: string) =>
    stream.write(text)
      ? Promise.resolve()
      : Promise.race([failed, new Promise<void>((done) => stream.once('drain', done))])
  let separator = '[\n'
  for (const line of lines) {
    await write(separator + line)
    separator = ',\n'
  }
  await write(separator === '[\n' ? '[]\n' : '\n]\n')
  if (out !== undefined) {
    stream.end()
    await Promise.race([failed, finished(stream)])
  }
}

import path from 'node:path'
import { parseArgs } from 'node:util'
import { DEMO_SEED, type DemoBirth } from './demo-files'
import { STORY_KEYS, type StoryKey } from './story'
import { HISTORY_S, type WorldOptions } from './world'

export const usage = `usage: npm run export-demo -- --out DIR [--weeks N] [--until TIME] [--seed N] [--without STORY,STORY]
  --out      folder for rooms.json, readings.csv, outdoor.csv and truth.json
  --weeks    weeks before the first start, 1 to 52 (8)
  --until    last instant, ISO 8601 with offset or Z (the first start)
  --seed     whole number (the demo's own)
  --without  stories to leave out: ${STORY_KEYS.join(', ')}`

export type ExportAsked = WorldOptions & { out: string; untilS: number }

/** Reads the command line, with the demo of the data folder (if any) as default; throws one sentence for what cannot be used. */
export function askedOf(argv: readonly string[], birth: DemoBirth | undefined, nowMs: number): ExportAsked {
  const { values } = parseArgs({
    args: [...argv],
    options: {
      out: { type: 'string' },
      weeks: { type: 'string' },
      until: { type: 'string' },
      seed: { type: 'string' },
      without: { type: 'string' },
    },
  })
  if (!values.out) throw new Error('--out is missing: name the folder to write to')
  const midnightS = Math.floor(nowMs / 86400000) * 86400
  const firstStartS = birth ? Date.parse(birth.firstStart) / 1000 : midnightS
  const untilS = values.until === undefined ? firstStartS : Date.parse(values.until) / 1000
  if (Number.isNaN(untilS) || (values.until && !/(Z|[+-]\d\d:?\d\d)$/.test(values.until)))
    throw new Error(`--until ${values.until}: expected ISO 8601 with offset or Z`)
  const weeks = wholeNumber('--weeks', values.weeks, HISTORY_S / 604800, 1, 52)
  const seed = wholeNumber('--seed', values.seed, birth?.seed ?? DEMO_SEED, 0, 2 ** 31)
  const historyS = weeks * 604800
  if (untilS <= firstStartS - historyS) throw new Error('--until lies before the first reading')
  const without = (values.without ?? '').split(',').filter(Boolean)
  const unknown = without.find((name) => !STORY_KEYS.includes(name as StoryKey))
  if (unknown) throw new Error(`--without ${unknown}: expected some of ${STORY_KEYS.join(', ')}`)
  const stories = Object.fromEntries(without.map((name) => [name, false]))
  return { out: path.resolve(values.out), untilS, seed, firstStartS, historyS, stories }
}

function wholeNumber(name: string, given: string | undefined, fallback: number, least: number, most: number) {
  const value = given === undefined ? fallback : Number(given)
  if (!Number.isInteger(value) || value < least || value > most)
    throw new Error(`${name} ${given}: expected a whole number from ${least} to ${most}`)
  return value
}

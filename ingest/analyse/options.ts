/** The command line of `analyse`. */
import { parseArgs } from 'node:util'

export const USAGE =
  'usage: npm run --silent analyse -- --rooms rooms.json --readings readings.csv [--outdoor outdoor.csv] [--out decays.json]\n' +
  '       npm run --silent analyse -- --tracer test.json'

export type AnalyseOptions =
  | { kind: 'tracer'; tracer: string }
  | { kind: 'decays'; rooms: string; readings: string; outdoor?: string; out?: string }
  | { kind: 'help' }

/** Reads the flags; throws an Error whose message says what is wrong and how the command is used. */
export function parseOptions(words: readonly string[]): AnalyseOptions {
  const text = { type: 'string' } as const
  const { values } = parseArgs({
    args: [...words],
    options: {
      rooms: text,
      readings: text,
      outdoor: text,
      out: text,
      tracer: text,
      help: { type: 'boolean', short: 'h' },
    },
    strict: true,
  })
  if (values.help) return { kind: 'help' }
  if (values.tracer !== undefined) {
    if (values.readings !== undefined) throw new Error('--tracer is given instead of --readings, not with it')
    return { kind: 'tracer', tracer: values.tracer }
  }
  if (values.rooms === undefined) throw new Error('--rooms is missing: expected the path of a rooms.json')
  if (values.readings === undefined)
    throw new Error('--readings is missing: expected the path of a readings.csv')
  const { rooms, readings, outdoor, out } = values
  return { kind: 'decays', rooms, readings, outdoor, out }
}

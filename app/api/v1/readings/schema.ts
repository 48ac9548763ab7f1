import { z } from 'zod'
import type { RollupResolution } from '@/db/queries/rollups'
import { Refusal } from '@/lib/errors'

const instant = z.iso.datetime({ offset: true }).transform((text) => Date.parse(text) / 1000)

export const RESOLUTIONS = ['raw', '5m', '15m', '1h', '1d'] as const

/** Length of a resolution's stretches in seconds (null: each reading; 86 400: a building-local day), and the longest span that one answer may hold, in days. */
export const RESOLUTION_FACTS: Record<
  (typeof RESOLUTIONS)[number],
  { resolutionS: RollupResolution | null; mostDays: number }
> = {
  raw: { resolutionS: null, mostDays: 31 },
  '5m': { resolutionS: 300, mostDays: 93 },
  '15m': { resolutionS: 900, mostDays: 186 },
  '1h': { resolutionS: 3600, mostDays: 732 },
  '1d': { resolutionS: 86_400, mostDays: 3660 },
}

/** `points` asks for a line to draw: at most so many points, lowest and highest of each stretch kept; it overrides resolution. */
export const readingsQuerySchema = z
  .object({
    room: z.string().max(64),
    from: instant,
    to: instant,
    resolution: z.enum(RESOLUTIONS).default('15m'),
    points: z.coerce.number().int().min(20).max(8000).optional(),
    format: z.enum(['json', 'csv']).default('json'),
  })
  .refine(({ from, to }) => to > from, { path: ['to'], message: 'must be later than from' })
  .refine(
    ({ from, to, resolution, points }) =>
      points !== undefined || to - from <= RESOLUTION_FACTS[resolution].mostDays * 86_400,
    {
      path: ['resolution'],
      message:
        'is too fine for this span: raw up to 31 days, 5m up to 93, 15m up to 186, 1h up to 732, 1d up to 3660',
    },
  )

/** The Idempotency-Key of a request, null where it has none; refuses one that is not 1 to 200 printable signs. */
export function idempotencyKeyOf(header: string | null): string | null {
  if (header === null) return null
  if (/^[\x21-\x7e]{1,200}$/.test(header)) return header
  throw new Refusal('bad-request', 'Idempotency-Key: expected 1 to 200 printable ASCII signs without spaces.')
}

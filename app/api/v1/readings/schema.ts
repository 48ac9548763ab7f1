import { z } from 'zod'

const instant = z.iso.datetime({ offset: true }).transform((text) => Date.parse(text) / 1000)

export const RESOLUTIONS = ['raw', '5m', '15m', '1h', '1d'] as const

/** How a resolution reads as a PostgreSQL interval, and the longest span that one answer may hold, in days. */
export const RESOLUTION_FACTS: Record<(typeof RESOLUTIONS)[number], { stretch: string; mostDays: number }> = {
  raw: { stretch: '', mostDays: 31 },
  '5m': { stretch: '5 minutes', mostDays: 93 },
  '15m': { stretch: '15 minutes', mostDays: 186 },
  '1h': { stretch: '1 hour', mostDays: 732 },
  '1d': { stretch: '1 day', mostDays: 3660 },
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

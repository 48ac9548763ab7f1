import { cautionOf, type SourceKey } from '../sources'

/** A CO2 limit: absolute or above outdoor, over what it is averaged, and where it comes from. It indicates ventilation, not health. */
export type Co2Limit = {
  kind: 'above outdoor' | 'absolute'
  limitPpm: number
  averaging: string
  origin: string
}

export type Co2LimitPreset = Co2Limit & { key: string; source: SourceKey }

const FIFTEEN = '15 min mean'

/** Limits that can be chosen. EN 16798-1 category IV is left out: its value is given in two ways. */
export const CO2_LIMITS: readonly Co2LimitPreset[] = [
  ...(
    [
      ['I', 550],
      ['II', 800],
      ['III', 1350],
    ] as const
  ).map(([category, limitPpm]) => ({
    key: `en16798-${category.toLowerCase()}`,
    kind: 'above outdoor' as const,
    limitPpm,
    averaging: FIFTEEN,
    origin: `EN 16798-1:2019 category ${category}`,
    source: 'en16798Co2' as const,
  })),
  {
    key: 'hse-800',
    kind: 'absolute',
    limitPpm: 800,
    averaging: FIFTEEN,
    origin: 'HSE: likely to be well ventilated below',
    source: 'hse',
  },
  {
    key: 'hse-1500',
    kind: 'absolute',
    limitPpm: 1500,
    averaging: FIFTEEN,
    origin: 'HSE: act when consistently above',
    source: 'hse',
  },
  {
    key: 'uba-1000',
    kind: 'absolute',
    limitPpm: 1000,
    averaging: FIFTEEN,
    origin: 'German Federal Environment Agency 2008: conspicuous above',
    source: 'uba',
  },
  {
    key: 'uba-2000',
    kind: 'absolute',
    limitPpm: 2000,
    averaging: FIFTEEN,
    origin: 'German Federal Environment Agency 2008: unacceptable above',
    source: 'uba',
  },
  {
    key: 'bb101-1000',
    kind: 'absolute',
    limitPpm: 1000,
    averaging: 'mean of the occupied day',
    origin: 'BB101:2018, mechanical ventilation',
    source: 'bb101',
  },
]

/** The limit of a room for which nothing else was chosen. */
export const DEFAULT_CO2_LIMIT: Co2LimitPreset = CO2_LIMITS.find((limit) => limit.key === 'en16798-ii')!

/** The CO2 level (ppm, as a sensor reads it) at which the limit lies, given the outdoor level. */
export function limitLevelPpm(limit: Co2Limit, outdoorPpm: number): number {
  return limit.kind === 'absolute' ? limit.limitPpm : outdoorPpm + limit.limitPpm
}

/** The limit in words, with its averaging and origin, e.g. "800 ppm above outdoor, 15 min mean (EN 16798-1:2019 category II)". */
export function limitInWords(limit: Co2Limit): string {
  const kind = limit.kind === 'absolute' ? '' : ' above outdoor'
  return `${limit.limitPpm} ppm${kind}, ${limit.averaging} (${limit.origin}); an indicator of ventilation, not a health limit`
}

/** The sentence to show beside a chosen limit; null where the document itself was read. */
export const limitCaution = (preset: Co2LimitPreset): string | null => cautionOf(preset.source)

/** Spans of a room's chart, as they stand in the address. */
export const RANGES = [
  { key: '24h', word: '24 hours', seconds: 86_400 },
  { key: '7d', word: '7 days', seconds: 7 * 86_400 },
  { key: '4w', word: '4 weeks', seconds: 28 * 86_400 },
] as const
export type Range = (typeof RANGES)[number]

/** The span an address names; seven days where it names none. */
export function rangeOf(value: string | string[] | undefined): Range {
  const key = Array.isArray(value) ? value[0] : value
  return RANGES.find((range) => range.key === key) ?? RANGES[1]
}

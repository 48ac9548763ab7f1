import { isoUtc } from '@/lib/time'

const heads: Record<string, string> = {
  atS: 'timestamp',
  co2Ppm: 'co2_ppm',
  tempC: 'temp_c',
  rhPct: 'rh_pct',
  meanPpm: 'co2_mean_ppm',
  lowestPpm: 'co2_lowest_ppm',
  highestPpm: 'co2_highest_ppm',
  readings: 'readings',
}

const cell = (name: string, value: unknown): string => {
  if (typeof value !== 'number') return ''
  return name === 'atS' ? isoUtc(value) : String(Number(value.toFixed(2)))
}

/** Readings as CSV (RFC 4180): units in the head, instants in UTC, an empty cell for what was not measured. */
export function readingsCsv(rows: readonly object[]): string {
  const names = Object.keys(rows[0] ?? { atS: 0, co2Ppm: 0 })
  const lines = rows.map((row) =>
    names.map((name) => cell(name, (row as Record<string, unknown>)[name])).join(','),
  )
  return `${[names.map((name) => heads[name] ?? name).join(','), ...lines].join('\r\n')}\r\n`
}

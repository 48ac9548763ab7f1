import type { AirChangeRow } from '../wire/air-change'
import { counted, countWord, sentenceCase } from './counts'

export const GROUPINGS = ['verdict', 'floor', 'tenancy', 'air handler'] as const
export type Grouping = (typeof GROUPINGS)[number]

export const SHOWN = ['all', 'changed', 'too few decays'] as const
export type Shown = (typeof SHOWN)[number]

export const SORTS = ['against basis', 'room', 'rate', 'decays', 'age', 'flow'] as const
export type AirChangeSort = (typeof SORTS)[number]

export type Group = { key: string; words: string; aside: string; rows: AirChangeRow[] }

const verdictOrder = ['short of basis', 'not proven', 'meets basis'] as const
const verdictAside = {
  'short of basis': 'the whole interval lies under the basis',
  'not proven': 'the interval spans the basis, or the figure proves nothing; each row says why',
  'meets basis': 'the whole interval lies at or above the basis',
}

/** Nights a row needs before it counts as well supported, as the verdict does. */
const enoughDays = 5

export function isShown(row: AirChangeRow, shown: Shown): boolean {
  if (shown === 'changed') return row.change !== null
  if (shown === 'too few decays') return row.days < enoughDays
  return true
}

const sortKey: Record<AirChangeSort, (row: AirChangeRow) => number | string> = {
  'against basis': (row) =>
    row.againstBasis ?? (row.rate === null ? Number.POSITIVE_INFINITY : 1e6 + row.rate),
  room: (row) => row.number,
  rate: (row) => row.rate ?? Number.POSITIVE_INFINITY,
  decays: (row) => row.decays,
  age: (row) => row.meanAgeMin ?? Number.POSITIVE_INFINITY,
  flow: (row) => row.flowLps ?? Number.POSITIVE_INFINITY,
}

/** Rows in the order asked for; those without the figure come last in either direction. */
export function sortRows(
  rows: readonly AirChangeRow[],
  sort: AirChangeSort,
  descending: boolean,
): AirChangeRow[] {
  const key = sortKey[sort]
  return [...rows].sort((a, b) => {
    const [ka, kb] = [key(a), key(b)]
    const missing = Number(ka === Number.POSITIVE_INFINITY) - Number(kb === Number.POSITIVE_INFINITY)
    if (missing !== 0) return missing
    const order =
      typeof ka === 'string' && typeof kb === 'string'
        ? ka.localeCompare(kb, 'en', { numeric: true })
        : Number(ka) - Number(kb)
    return (descending ? -order : order) || a.number.localeCompare(b.number, 'en', { numeric: true })
  })
}

/** The table's groups in reading order: the work list of rooms short of their basis first, or floors from the top. */
export function groupRows(rows: readonly AirChangeRow[], grouping: Grouping): Group[] {
  const keyOf = (row: AirChangeRow) =>
    grouping === 'verdict'
      ? row.verdict
      : grouping === 'floor'
        ? row.floor
        : grouping === 'tenancy'
          ? (row.tenancy ?? 'No tenancy')
          : (row.airHandler ?? 'No air handler')
  const groups = new Map<string, AirChangeRow[]>()
  for (const row of rows) groups.set(keyOf(row), [...(groups.get(keyOf(row)) ?? []), row])
  return [...groups]
    .sort(([a, rowsA], [b, rowsB]) => {
      if (grouping === 'verdict') return verdictOrder.indexOf(a as never) - verdictOrder.indexOf(b as never)
      if (grouping === 'floor') return (rowsB[0]?.floorOrdinal ?? 0) - (rowsA[0]?.floorOrdinal ?? 0)
      return a.localeCompare(b)
    })
    .map(([key, own]) => ({
      key,
      words: sentenceCase(key),
      aside:
        grouping === 'verdict'
          ? `${counted(own.length, 'room')}: ${verdictAside[key as keyof typeof verdictAside]}`
          : counted(own.length, 'room'),
      rows: own,
    }))
}

/** "Four are short, three are not proven, seventeen meet it." */
export function verdictCounts(rows: readonly AirChangeRow[]): string {
  const count = (verdict: AirChangeRow['verdict']) => rows.filter((row) => row.verdict === verdict).length
  const [short, open, meets] = [count('short of basis'), count('not proven'), count('meets basis')]
  const be = (n: number) => (n === 1 ? 'is' : 'are')
  return `${sentenceCase(countWord(short))} ${be(short)} short, ${countWord(open)} ${be(open)} not proven, ${countWord(meets)} ${meets === 1 ? 'meets' : 'meet'} it.`
}

/** Upper end of the column's common scale, 1/h: the next even number above what most rooms need, at most 12. */
export function scaleMax(rows: readonly AirChangeRow[]): number {
  const ends = rows.flatMap((row) => [row.rateHigh ?? row.rateLow ?? 0, row.basisRate ?? 0])
  return Math.min(12, Math.max(4, Math.ceil(Math.max(...ends, 0) / 2) * 2))
}

/** The table as CSV (RFC 4180), units in the head. */
export function airChangeCsv(rows: readonly AirChangeRow[]): string {
  const head = [
    'room_number',
    'room',
    'floor',
    'tenancy',
    'air_handler',
    'mode',
    'mode_from',
    'rate_per_h',
    'rate_low_per_h',
    'rate_high_per_h',
    'dilution_rate_only',
    'days',
    'decays',
    'mean_age_min',
    'outdoor_air_l_per_s',
    'outdoor_air_low_l_per_s',
    'outdoor_air_high_l_per_s',
    'basis',
    'basis_l_per_s',
    'design_headcount',
    'verdict',
    'verdict_reason',
    'change',
  ]
  const lines = rows.map((row) => [
    row.number,
    row.name,
    row.floor,
    row.tenancy,
    row.airHandler,
    row.mode,
    row.modeFrom,
    row.rate,
    row.rateLow,
    row.rateHigh,
    row.isDilutionRate,
    row.days,
    row.decays,
    row.meanAgeMin,
    row.flowLps,
    row.flowLowLps,
    row.flowHighLps,
    row.basisName,
    row.basisFlowLps,
    row.designHeadcount,
    row.verdict,
    row.verdictSentence,
    row.change?.sentence ?? null,
  ])
  return `${[head, ...lines].map((line) => line.map(csvCell).join(',')).join('\r\n')}\r\n`
}

function csvCell(value: string | number | boolean | null): string {
  if (value === null) return ''
  const text =
    typeof value === 'number' && !Number.isInteger(value)
      ? String(Number(value.toPrecision(6)))
      : String(value)
  // a spreadsheet would run a cell that begins like a formula
  const safe = typeof value === 'string' && /^[=+\-@\t\r]/.test(text) ? `'${text}` : text
  return /[",\r\n]/.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe
}

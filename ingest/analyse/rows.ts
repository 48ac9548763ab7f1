/** CSV files of any length, row by row, with line numbers; nothing but the row in hand is kept. */
import { createReadStream } from 'node:fs'
import { parse } from 'csv-parse/sync'
import { InputError, RowProblems } from './problems'

function splitRow(line: string): string[] {
  if (!line.includes('"')) return line.split(',')
  const rows = parse(line, { relax_column_count: true }) as string[][]
  return rows[0] ?? []
}

async function* linesOf(file: string): AsyncGenerator<string[]> {
  let rest = ''
  const stream = createReadStream(file, { encoding: 'utf8', highWaterMark: 1 << 20 })
  for await (const chunk of stream) {
    const text = rest + (chunk as string)
    const end = text.lastIndexOf('\n')
    rest = text.slice(end + 1)
    if (end >= 0) yield text.slice(0, end).split('\n')
  }
  if (rest !== '') yield [rest]
}

const bare = (cell: string | undefined) => (cell ?? '').trim()

/**
 * Calls `take` for each data row with the wanted columns in their order. `take` returns what was expected when the row is bad, else null.
 * Throws an InputError when the file cannot be read, its header lacks a column, or more than half of its rows are bad.
 */
export async function readRows(
  file: string,
  columns: readonly string[],
  take: (cells: string[]) => string | null,
  say: (line: string) => void,
): Promise<number> {
  const problems = new RowProblems(file, say)
  const expected = `expected the header ${columns.join(',')}`
  let order: number[] | null = null
  let inOrder = false
  let lineNumber = 0
  let rows = 0
  try {
    for await (const lines of linesOf(file)) {
      for (const raw of lines) {
        lineNumber++
        const line = raw.endsWith('\r') ? raw.slice(0, -1) : raw
        if (order === null) {
          const header = splitRow(line.replace(/^\uFEFF/, '')).map((cell) => bare(cell).toLowerCase())
          order = columns.map((column) => header.indexOf(column))
          if (order.some((at) => at < 0)) throw new InputError([`${file}:1: ${expected}`])
          inOrder = order.every((at, i) => at === i)
          continue
        }
        if (line.trim() === '') continue
        rows++
        let bad: string | null
        try {
          const cells = splitRow(line)
          bad = take(inOrder ? cells : order.map((at) => cells[at] ?? ''))
        } catch {
          bad = `expected ${columns.length} comma-separated values`
        }
        if (bad !== null) problems.add(lineNumber, bad)
      }
    }
  } catch (error) {
    if (error instanceof InputError) throw error
    throw new InputError([`${file}:1: cannot be read: ${expected}`])
  }
  if (order === null) throw new InputError([`${file}:1: the file is empty: ${expected}`])
  problems.finish(rows)
  return rows
}

/** A reading's CO2 as a number, or what was expected instead. */
export function parseCo2(cell: string | undefined): number | string {
  const text = bare(cell)
  const value = Number(text)
  if (text === '' || !Number.isFinite(value))
    return `expected co2_ppm as a number, not "${text.slice(0, 40)}"`
  if (value < 1 || value > 50_000) return `expected co2_ppm between 1 and 50000, not ${text.slice(0, 40)}`
  return value
}

import { mkdirSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { parseArgs } from 'node:util'

/** Where a benchmark leaves its figures, from the repository's root. */
const OUT = 'tests/.out/bench'

/** Writes a benchmark's figures for machines. */
export function writeReport(name: string, figures: unknown) {
  mkdirSync(OUT, { recursive: true })
  const path = join(OUT, `${name}.json`)
  writeFileSync(path, `${JSON.stringify(figures, null, 2)}\n`)
  console.log(`\nwritten: ${path}`)
}

/** A plain table: first column left, the rest right. */
export function printTable(head: readonly string[], rows: readonly (readonly string[])[]) {
  const widths = head.map((cell, c) => Math.max(cell.length, ...rows.map((row) => (row[c] ?? '').length)))
  const line = (row: readonly string[]) =>
    row.map((cell, c) => (c === 0 ? cell.padEnd(widths[c]!) : cell.padStart(widths[c]!))).join('  ')
  console.log(line(head))
  console.log(widths.map((w) => '-'.repeat(w)).join('  '))
  for (const row of rows) console.log(line(row))
}

/** Options given as --name value; a wrong one ends the program with what is allowed. */
export function options<T extends Record<string, string>>(defaults: T): T {
  const shape = Object.fromEntries(Object.keys(defaults).map((key) => [key, { type: 'string' as const }]))
  try {
    const { values } = parseArgs({ options: shape, strict: true, allowPositionals: false })
    return { ...defaults, ...values } as T
  } catch (error) {
    console.error(
      `${(error as Error).message}\nOptions: ${Object.keys(defaults)
        .map((k) => `--${k}`)
        .join(' ')}`,
    )
    process.exit(2)
  }
}

/** A whole number from an option, or an end with one line that says which. */
export function wholeNumber(name: string, text: string, least: number): number {
  const value = Number(text)
  if (Number.isInteger(value) && value >= least) return value
  console.error(`--${name} must be a whole number of at least ${least}, not "${text}"`)
  process.exit(2)
}

export const percent = (share: number, digits = 1) =>
  Number.isNaN(share) ? '–' : (100 * share).toFixed(digits)

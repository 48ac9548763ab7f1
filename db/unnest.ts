/**
 * Columns of many rows as text arrays for `unnest`, e.g. `{1,2,NULL}`; several times faster than the driver's own array encoding.
 * Numbers only: nothing in it needs quoting.
 */
export function numberColumns<Row>(
  rows: readonly Row[],
  columns: readonly ((row: Row) => number | null)[],
): string[] {
  return columns.map((column) => {
    let text = ''
    for (const row of rows) {
      const value = column(row)
      text += value === null ? ',NULL' : `,${value}`
    }
    return `{${text.slice(1)}}`
  })
}

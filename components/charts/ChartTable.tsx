import { Table, Td, Th, Tr } from '@/components/ui/Table'
import type { ChartTableData } from './types'

/** The chart as a table, folded; it is there without JavaScript too. */
export function ChartTable({ table }: { table: ChartTableData }) {
  return (
    <details className="no-print mt-1 text-2">
      <summary className="w-fit py-1 text-ink-2 underline decoration-edge underline-offset-[3px]">
        Read as a table
      </summary>
      <section
        className="mt-2 max-h-[340px] overflow-auto border-t border-rule"
        aria-label={table.caption}
        // biome-ignore lint/a11y/noNoninteractiveTabindex: what scrolls must be reachable by keyboard
        tabIndex={0}
      >
        <Table caption={table.caption}>
          <thead>
            <tr>
              {table.columns.map((column, i) => (
                <Th key={column} numeric={i > 0}>
                  {column}
                </Th>
              ))}
            </tr>
          </thead>
          <tbody>
            {table.rows.map((row) => (
              <Tr key={row.join('|')}>
                {row.map((cell, i) => (
                  <Td key={i} numeric={i > 0}>
                    {cell}
                  </Td>
                ))}
              </Tr>
            ))}
          </tbody>
        </Table>
      </section>
    </details>
  )
}

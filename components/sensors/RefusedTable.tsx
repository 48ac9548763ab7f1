import { formatInTimeZone } from 'date-fns-tz'
import { Table, Td, Th, Tr } from '@/components/ui/Table'
import type { Refusal } from '@/lib/wire/sensors'

/** Messages and connects that were refused, newest hour first, each with its remedy and one sample. */
export function RefusedTable({ refusals, timeZone }: { refusals: readonly Refusal[]; timeZone: string }) {
  if (refusals.length === 0)
    return (
      <p className="mt-8 text-2 text-ink-3">No message of this sensor was refused in the last 14 days.</p>
    )
  return (
    <section className="mt-12">
      <h2 className="mb-2 text-3">Refused in the last 14 days</h2>
      <Table caption="Refused messages of this sensor">
        <thead>
          <tr>
            <Th>Hour</Th>
            <Th numeric>Count</Th>
            <Th>Why</Th>
            <Th className="max-sm:hidden">Sample</Th>
          </tr>
        </thead>
        <tbody>
          {refusals.map((refusal) => (
            <Tr key={`${refusal.reason} ${refusal.hourS}`}>
              <Td className="fig text-[13px] whitespace-nowrap">
                {formatInTimeZone(refusal.hourS * 1000, timeZone, 'd MMM HH:00')}
              </Td>
              <Td numeric>{refusal.count}</Td>
              <Td className="text-2">
                <span className="fig">{refusal.reason}</span>{' '}
                <span className="text-ink-2">{refusal.detail}</span>
              </Td>
              <Td className="fig max-w-[24em] text-1 break-all text-ink-3 max-sm:hidden">
                {refusal.sample?.slice(0, 160)}
              </Td>
            </Tr>
          ))}
        </tbody>
      </Table>
    </section>
  )
}

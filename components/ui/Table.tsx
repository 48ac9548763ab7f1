import Link from 'next/link'
import type { ReactNode } from 'react'
import { cx } from './cx'

/** A ruled table; `caption` is its name for those who do not see it. */
export function Table({
  caption,
  children,
  className,
}: {
  caption: string
  children: ReactNode
  className?: string
}) {
  return (
    <table className={cx('w-full border-collapse', className)}>
      <caption className="sr-only">{caption}</caption>
      {children}
    </table>
  )
}

export type Sort = { direction: 'ascending' | 'descending' | null; href: string }

type Cell = { children?: ReactNode; numeric?: boolean; className?: string; colSpan?: number; title?: string }

/** A head cell: the unit belongs in it. With `sort` its words are a link; the sorted column is bold with an arrow. */
export function Th({ children, numeric, className, sort, colSpan, title }: Cell & { sort?: Sort }) {
  const arrow = sort?.direction === 'ascending' ? ' ↑' : sort?.direction === 'descending' ? ' ↓' : ''
  return (
    <th
      scope="col"
      colSpan={colSpan}
      title={title}
      aria-sort={sort?.direction ?? undefined}
      className={cx(
        'border-b border-ink pt-[6px] pr-4 pb-[7px] align-bottom text-2 leading-[1.25] font-[500] text-ink-3 last:pr-0',
        numeric ? 'text-right' : 'text-left',
        className,
      )}
    >
      {sort ? (
        <Link
          href={sort.href}
          scroll={false}
          className={cx('plain-link', sort.direction && 'font-[650] text-ink')}
        >
          {children}
          {arrow}
        </Link>
      ) : (
        children
      )}
    </th>
  )
}

/** A row; hovering lifts it to leaf. */
export function Tr({ children, className }: { children: ReactNode; className?: string }) {
  return <tr className={cx('border-t border-rule first:border-t-0 hover:bg-leaf', className)}>{children}</tr>
}

/** A body cell; figures are mono and stand right. */
export function Td({ children, numeric, className, colSpan, title }: Cell) {
  return (
    <td
      colSpan={colSpan}
      title={title}
      className={cx(
        'py-[6px] pr-4 align-middle text-[15px] leading-5 last:pr-0',
        numeric && 'fig text-right text-[14px] whitespace-nowrap',
        className,
      )}
    >
      {children}
    </td>
  )
}

/** A group's head inside a body: words over an ink line. */
export function GroupRow({
  words,
  aside,
  columns,
}: {
  words: ReactNode
  aside?: ReactNode
  columns: number
}) {
  return (
    <tr className="border-t border-ink first:border-t-0">
      <th scope="colgroup" colSpan={columns} className="pt-[18px] pb-[5px] text-left text-3 font-[650]">
        {words}
        {aside && (
          <span className="ml-[10px] text-2 font-normal text-ink-3 max-sm:ml-0 max-sm:block">{aside}</span>
        )}
      </th>
    </tr>
  )
}

/** Name and value pairs under hairlines, the value at the right. */
export function Pairs({ rows }: { rows: readonly { name: ReactNode; value: ReactNode; key: string }[] }) {
  return (
    <dl>
      {rows.map((row) => (
        <div
          key={row.key}
          className="flex items-baseline justify-between gap-4 border-t border-rule py-[7px] text-[15px] leading-5 first:border-t-0"
        >
          <dt className="min-w-0">{row.name}</dt>
          <dd className="flex-none text-right">{row.value}</dd>
        </div>
      ))}
    </dl>
  )
}

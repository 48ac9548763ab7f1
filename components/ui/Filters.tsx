import Link from 'next/link'
import type { ReactNode } from 'react'
import { cx } from './cx'

export type FilterChoice = { word: string; href: string; current: boolean; count?: number }
export type FilterGroup = { label: string; choices: readonly FilterChoice[] }

/** Filters as links: a label, then plain words with counts; the current one is bold over a line. Each is an address. */
export function Filters({
  groups,
  end,
  label = 'Filter',
}: {
  groups: readonly FilterGroup[]
  end?: ReactNode
  label?: string
}) {
  return (
    <nav
      aria-label={label}
      className="no-print flex flex-wrap gap-x-8 gap-y-[6px] border-t border-rule pt-[10px] pb-[11px] text-2 text-ink-3 max-sm:flex-col"
    >
      {groups.map((group) => (
        <fieldset
          key={group.label}
          className="flex min-w-0 items-baseline gap-[13px] max-sm:w-full max-sm:overflow-x-auto max-sm:whitespace-nowrap max-sm:[scrollbar-width:none]"
        >
          <legend className="float-left">{group.label}</legend>
          {group.choices.map((choice) => (
            <FilterLink key={choice.word} choice={choice} />
          ))}
        </fieldset>
      ))}
      {end && <div className="sm:ml-auto">{end}</div>}
    </nav>
  )
}

/** Words to pick one from, such as the range of a chart. */
export function Picks({ label, choices }: { label: string; choices: readonly FilterChoice[] }) {
  return (
    <nav aria-label={label} className="no-print flex gap-[14px] text-2">
      {choices.map((choice) => (
        <FilterLink key={choice.word} choice={choice} />
      ))}
    </nav>
  )
}

function FilterLink({ choice }: { choice: FilterChoice }) {
  return (
    <Link
      href={choice.href}
      scroll={false}
      aria-current={choice.current ? 'true' : undefined}
      className={cx(
        'inline-block min-w-6 flex-none py-[3px] no-underline hover:text-ink max-sm:py-[11px]',
        choice.current ? 'font-[650] text-ink shadow-[0_2px_0_var(--ink)]' : 'text-ink-2 hover:underline',
      )}
    >
      {choice.word}
      {choice.count !== undefined && (
        <span className="fig ml-[3px] text-1 font-normal text-ink-3">{choice.count}</span>
      )}
    </Link>
  )
}

'use client'

import Link from 'next/link'
import { usePathname } from 'next/navigation'
import { cx } from '@/components/ui/cx'
import type { NavigationItem } from '@/lib/policy/navigation'

/** The item whose page, or whose page's parent, is open: the one with the longest address that fits. */
function currentOf(items: readonly NavigationItem[], pathname: string): string | undefined {
  const fits = items.filter(({ href }) => pathname === href || pathname.startsWith(`${href}/`))
  return fits.sort((a, b) => b.href.length - a.href.length)[0]?.href
}

/** The words of the masthead; the current one is bold over a line of 3 px. */
export function NavLinks({ items, stacked }: { items: readonly NavigationItem[]; stacked?: boolean }) {
  const current = currentOf(items, usePathname())
  return items.map((item) => {
    const here = item.href === current
    return (
      <Link
        key={item.href}
        href={item.href}
        aria-current={here ? 'page' : undefined}
        className={cx(
          'relative flex items-center text-[15px] no-underline hover:text-ink',
          stacked && 'min-h-[44px] border-t border-rule first:border-t-0',
          here ? 'font-[650] text-ink' : 'text-ink-2',
          here && !stacked && 'after:absolute after:inset-x-0 after:-bottom-px after:h-[3px] after:bg-ink',
        )}
      >
        {item.word}
      </Link>
    )
  })
}

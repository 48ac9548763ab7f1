import Link from 'next/link'
import type { ReactNode } from 'react'
import { cx } from './cx'

/** The page's own width and margins; `main` of the document. */
export function Page({ children, className }: { children: ReactNode; className?: string }) {
  return (
    <main id="main" className={cx('mx-auto max-w-page px-10 pb-18 max-sm:px-5 max-sm:pb-12', className)}>
      {children}
    </main>
  )
}

/** Title that says the finding, a sentence under it, and what stands at the end of the line. */
export function PageHead({
  title,
  lead,
  end,
  live,
}: {
  title: ReactNode
  lead?: ReactNode
  end?: ReactNode
  live?: boolean
}) {
  return (
    <div className="flex items-end gap-8 pt-6 pb-4 max-sm:flex-wrap max-sm:gap-3 max-sm:pt-5 max-sm:pb-[14px]">
      <div aria-live={live ? 'polite' : undefined}>
        <h1>{title}</h1>
        {lead && <p className="mt-[6px] max-w-measure text-ink-2">{lead}</p>}
      </div>
      {end && (
        <div className="ml-auto text-right text-2 text-ink-2 max-sm:ml-0 max-sm:w-full max-sm:text-left">
          {end}
        </div>
      )}
    </div>
  )
}

export type Crumb = { word: string; href?: string }

/** Where this page stands, and its neighbours at the end. */
export function Crumbs({ crumbs, end }: { crumbs: readonly Crumb[]; end?: readonly Crumb[] }) {
  return (
    <div className="flex gap-2 pt-4 text-2 text-ink-3">
      <nav aria-label="Where this is">
        <ol className="flex flex-wrap gap-2">
          {crumbs.map((crumb, i) => (
            <li key={crumb.word} aria-current={i === crumbs.length - 1 ? 'page' : undefined}>
              {i > 0 && <span aria-hidden="true">/ </span>}
              {crumb.href ? <Link href={crumb.href}>{crumb.word}</Link> : crumb.word}
            </li>
          ))}
        </ol>
      </nav>
      {end && (
        <nav aria-label="Neighbours" className="no-print ml-auto flex gap-4 max-sm:hidden">
          {end.map((crumb) => (
            <Link key={crumb.word} href={crumb.href ?? '#'}>
              {crumb.word}
            </Link>
          ))}
        </nav>
      )}
    </div>
  )
}

/** Body with a margin of 304 px at its right; under 1181 px the margin comes below. */
export function WithMargin({ children, margin }: { children: ReactNode; margin: ReactNode }) {
  return (
    <div className="grid grid-cols-[minmax(0,1fr)_304px] gap-16 max-lg:grid-cols-[minmax(0,1fr)] max-lg:gap-8">
      <div className="min-w-0">{children}</div>
      <aside className="pt-[18px] max-lg:pt-0">{margin}</aside>
    </div>
  )
}

/** A section of the margin: under an ink line, it answers one question. */
export function MarginSection({
  title,
  children,
  className,
}: {
  title: ReactNode
  children: ReactNode
  className?: string
}) {
  return (
    <section className={cx('not-first:mt-8', className)}>
      <h2 className="mb-1 border-t border-ink pt-2 text-3">{title}</h2>
      {children}
    </section>
  )
}

/** Title of a figure with what belongs to its line. */
export function FigureHead({
  title,
  beside,
  end,
}: {
  title: ReactNode
  beside?: ReactNode
  end?: ReactNode
}) {
  return (
    <div className="mb-[10px] flex flex-wrap items-baseline gap-x-4 gap-y-1">
      <h2 className="text-3">{title}</h2>
      {beside}
      {end && <div className="ml-auto text-2 max-sm:ml-0">{end}</div>}
    </div>
  )
}

/** A caution that travels with a figure. */
export function Caution({ children }: { children: ReactNode }) {
  return <p className="mt-2 max-w-measure text-2 text-ink-3">{children}</p>
}

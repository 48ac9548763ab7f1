import type { ReactNode } from 'react'
import { cx } from './cx'

type Around = {
  title: ReactNode
  children: ReactNode
  actions?: ReactNode
  drawing?: ReactNode
  level?: 1 | 2
}

function Frame({
  title,
  children,
  actions,
  drawing,
  level = 1,
  role,
}: Around & { role?: 'alert' | 'status' }) {
  const Heading = level === 1 ? 'h1' : 'h2'
  return (
    <section
      role={role}
      className={cx('border-t border-ink pt-[22px]', drawing && 'grid grid-cols-[44px_minmax(0,1fr)] gap-6')}
    >
      {drawing && <div>{drawing}</div>}
      <div>
        <Heading className="text-[24px] leading-[1.15] font-[650] tracking-[-.012em]">{title}</Heading>
        <div className="mt-2 max-w-[34em]">{children}</div>
        {actions && <div className="mt-4 flex flex-wrap items-center gap-[14px]">{actions}</div>}
      </div>
    </section>
  )
}

/** Nothing here: what that means, and where to look or what to do next. `drawing` is a level glass where one helps. */
export function EmptyState(props: Around) {
  return <Frame {...props} />
}

/** Something went wrong: what happened, what is safe, what to do; `quote` is the reference to give to an administrator. */
export function ErrorState({
  title,
  happened,
  safe,
  todo,
  actions,
  drawing,
  quote,
  level,
}: {
  title: ReactNode
  happened: ReactNode
  safe: ReactNode
  todo: ReactNode
  actions?: ReactNode
  drawing?: ReactNode
  quote?: string
  level?: 1 | 2
}) {
  return (
    <Frame title={title} actions={actions} drawing={drawing} level={level} role="alert">
      <p>
        <b>What happened.</b> {happened}
      </p>
      <p>
        <b>What is safe.</b> {safe}
      </p>
      <p>
        <b>What to do.</b> {todo}
      </p>
      {quote && (
        <p className="mt-2 text-2 text-ink-3">
          If it stays, quote <span className="fig">{quote}</span> to your administrator.
        </p>
      )}
    </Frame>
  )
}

/** Holds the place of what is still on its way, at its size; it does not shimmer. */
export function Skeleton({
  className,
  width,
  height,
}: {
  className?: string
  width?: number | string
  height: number | string
}) {
  return (
    <div
      aria-hidden="true"
      className={cx('rounded-1 bg-rule opacity-50', className)}
      style={{ width: width ?? '100%', height }}
    />
  )
}

/** Tells those who do not see the skeleton what is being waited for. */
export function Waiting({ children, words }: { children: ReactNode; words: string }) {
  return (
    <div aria-busy="true">
      <p role="status" className="sr-only">
        {words}
      </p>
      {children}
    </div>
  )
}

/** How far something is: words, count and a bar. */
export function Progress({
  words,
  done,
  of,
  unit,
}: {
  words: string
  done: number
  of: number
  unit: string
}) {
  return (
    <div className="text-2">
      <div className="flex justify-between">
        <span>{words}</span>
        <span className="fig">
          {done} of {of} {unit}
        </span>
      </div>
      <progress
        className="mt-[7px] block h-1 w-full appearance-none bg-rule [&::-moz-progress-bar]:bg-tide [&::-webkit-progress-bar]:bg-rule [&::-webkit-progress-value]:bg-tide"
        value={done}
        max={of}
        aria-label={words}
      />
    </div>
  )
}

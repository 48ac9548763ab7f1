import type { ReactNode } from 'react'
import { cx } from './cx'

/** A number with its unit. `made` says how it was made, for hover, focus and screen readers. */
export function Figure({
  value,
  unit,
  made,
  className,
}: {
  value: ReactNode
  unit: string
  made?: string
  className?: string
}) {
  const body = (
    <>
      <span className="fig">{value}</span>
      {/* the narrow no-break space keeps number and unit on one line */}{' '}
      <span className="text-[.86em] text-ink-3">{unit}</span>
    </>
  )
  if (!made) return <span className={cx('whitespace-nowrap', className)}>{body}</span>
  return (
    <button
      type="button"
      title={made}
      aria-description={made}
      className={cx(
        'cursor-help whitespace-nowrap decoration-edge decoration-dotted underline-offset-4 hover:underline',
        className,
      )}
    >
      {body}
    </button>
  )
}

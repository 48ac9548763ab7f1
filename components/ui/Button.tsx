import Link from 'next/link'
import type { ButtonHTMLAttributes, ReactNode } from 'react'
import { cx } from './cx'

type Look = {
  /** `main` is the one main action of a page; `text` a quiet one */
  look?: 'main' | 'plain' | 'text'
  size?: 'normal' | 'small' | 'touch'
}

const looks = {
  main: 'border-deep bg-deep text-on-deep hover:opacity-92',
  plain: 'border-edge hover:border-ink hover:bg-leaf',
  text: 'border-transparent font-[500] underline decoration-edge underline-offset-[3px] hover:decoration-current',
}
const sizes = {
  normal: 'h-control text-[15px] max-sm:h-[44px]',
  small: 'h-[32px] text-2 max-sm:h-[44px]',
  touch: 'h-touch text-[16.5px]',
}
const pads = { main: 'px-4', plain: 'px-4', text: 'px-1' }

const classOf = ({ look = 'plain', size = 'normal' }: Look, extra?: string) =>
  cx(
    'no-print inline-flex items-center justify-center gap-2 whitespace-nowrap rounded-2 border font-[600] leading-none no-underline transition-colors duration-quick disabled:cursor-not-allowed disabled:opacity-55',
    looks[look],
    sizes[size],
    size === 'small' && look !== 'text' ? 'px-3' : pads[look],
    extra,
  )

/** A button; its words say what happens. `type` is button unless it is said to submit. */
export function Button({
  look,
  size,
  className,
  type = 'button',
  ...rest
}: Look & ButtonHTMLAttributes<HTMLButtonElement>) {
  return <button type={type} className={classOf({ look, size }, className)} {...rest} />
}

/** A link that leads on like a button. */
export function ButtonLink({
  look,
  size,
  href,
  children,
  className,
}: Look & { href: string; children: ReactNode; className?: string }) {
  return (
    <Link href={href} className={classOf({ look, size }, className)}>
      {children}
    </Link>
  )
}

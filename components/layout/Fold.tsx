'use client'

import { usePathname } from 'next/navigation'
import { type ReactNode, useEffect, useRef } from 'react'

/** A panel behind a word. It is a details element, so it opens without JavaScript; with it, Escape, a click outside and a new page close it. */
export function Fold({
  word,
  children,
  className,
}: {
  word: ReactNode
  children: ReactNode
  className?: string
}) {
  const fold = useRef<HTMLDetailsElement>(null)
  const pathname = usePathname()
  useEffect(() => fold.current?.removeAttribute('open'), [pathname])
  useEffect(() => {
    const close = (event: Event) => {
      const open = fold.current?.open
      if (!open) return
      const byEscape = event instanceof KeyboardEvent && event.key === 'Escape'
      const outside = event instanceof PointerEvent && !fold.current?.contains(event.target as Node)
      if (!byEscape && !outside) return
      fold.current?.removeAttribute('open')
      if (byEscape) fold.current?.querySelector('summary')?.focus()
    }
    document.addEventListener('keydown', close)
    document.addEventListener('pointerdown', close)
    return () => {
      document.removeEventListener('keydown', close)
      document.removeEventListener('pointerdown', close)
    }
  }, [])
  return (
    <details ref={fold} className={className}>
      <summary className="flex list-none items-center [&::-webkit-details-marker]:hidden">{word}</summary>
      <div className="absolute right-0 z-20 mt-2 w-[288px] border border-ink bg-paper p-5 text-left whitespace-normal max-sm:fixed max-sm:inset-x-0 max-sm:w-auto max-sm:border-x-0">
        {children}
      </div>
    </details>
  )
}

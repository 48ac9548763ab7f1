'use client'

import { useId, useState } from 'react'
import { THEME_COOKIE, THEMES, type Theme } from '@/lib/format/theme'

const YEAR_S = 365 * 24 * 3600

/** Keeps the choice in a cookie, so that the server draws the next page in it, and shows it at once. */
function choose(theme: Theme | null): void {
  const age = theme === null ? 0 : YEAR_S
  // biome-ignore lint/suspicious/noDocumentCookie: the Cookie Store API is not everywhere yet
  document.cookie = `${THEME_COOKIE}=${theme ?? ''}; path=/; max-age=${age}; samesite=lax`
  if (theme === null) delete document.documentElement.dataset.theme
  else document.documentElement.dataset.theme = theme
}

const words: Record<Theme | 'system', string> = { system: 'as the system', light: 'light', dark: 'dark' }

/** Light, dark, or as the reader's system asks. */
export function ThemeSwitch({ theme }: { theme: Theme | null }) {
  // the masthead holds this twice, for wide and narrow: each has a group of its own
  const name = useId()
  const [chosen, setChosen] = useState<Theme | 'system'>(theme ?? 'system')
  return (
    <fieldset className="text-2">
      <legend className="pb-1 font-[600]">Light or dark</legend>
      {(['system', ...THEMES] as const).map((choice) => (
        <label
          key={choice}
          className="flex min-h-[32px] cursor-pointer items-center gap-[10px] max-sm:min-h-[44px]"
        >
          <input
            type="radio"
            name={name}
            className="size-4 accent-(--tide)"
            checked={chosen === choice}
            onChange={() => {
              setChosen(choice)
              choose(choice === 'system' ? null : choice)
            }}
          />
          {words[choice]}
        </label>
      ))}
    </fieldset>
  )
}

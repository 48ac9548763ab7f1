import Link from 'next/link'
import type { Theme } from '@/lib/format/theme'
import type { NavigationItem } from '@/lib/policy/navigation'
import { Clock } from './Clock'
import { Fold } from './Fold'
import { Mark } from './Mark'
import { NavLinks } from './NavLinks'
import { PersonPanel, type PersonPanelProps } from './PersonPanel'

export type MastheadProps = {
  home: string
  navigation: readonly NavigationItem[]
  building: { name: string; slug: string; timeZone: string } | null
  nowS: number
  theme: Theme | null
} & Omit<PersonPanelProps, 'theme'>

/** Mark, words by role, building, its time with zone, person. Under 901 px the words stand behind Menu. */
export function Masthead({ home, navigation, building, nowS, theme, ...person }: MastheadProps) {
  const panel = <PersonPanel theme={theme} {...person} />
  return (
    <header className="no-print border-b border-ink">
      <a href="#main" className="absolute left-2 -top-20 z-30 bg-paper px-3 py-2 focus:top-2">
        Skip to content
      </a>
      <div className="mx-auto flex h-14 max-w-page items-stretch gap-8 px-10 max-sm:h-[52px] max-sm:gap-4 max-sm:px-5">
        <Link
          href={home}
          className="flex items-center gap-[10px] text-[17px] font-[680] tracking-[-.01em] no-underline"
        >
          <Mark />
          Ebbmark
        </Link>
        <nav aria-label="Main" className="flex items-stretch gap-[22px] max-md:hidden">
          <NavLinks items={navigation} />
        </nav>
        <div className="relative ml-auto flex items-center gap-6 text-2 whitespace-nowrap text-ink-2 max-sm:gap-[14px]">
          {building && <b className="font-[600] text-ink max-md:hidden">{building.name}</b>}
          {building && <Clock nowS={nowS} timeZone={building.timeZone} />}
          <Fold
            word={
              <span className="flex h-8 items-center underline decoration-edge underline-offset-[3px]">
                {person.name}
              </span>
            }
            className="max-md:hidden"
          >
            {panel}
          </Fold>
          <Fold
            word={
              <span className="flex h-8 items-center rounded-2 border border-edge px-3 font-[600] text-ink max-sm:h-[44px]">
                Menu
              </span>
            }
            className="md:hidden"
          >
            <nav aria-label="Menu" className="mb-4 grid">
              <NavLinks items={navigation} stacked />
            </nav>
            {panel}
          </Fold>
        </div>
      </div>
    </header>
  )
}

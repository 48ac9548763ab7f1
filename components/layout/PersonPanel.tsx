import { Button } from '@/components/ui/Button'
import type { Theme } from '@/lib/format/theme'
import { ThemeSwitch } from './ThemeSwitch'

export type PersonPanelProps = {
  name: string
  email: string
  roleWords: string
  theme: Theme | null
  buildings: readonly { name: string; slug: string; current: boolean }[]
  mailboxHref: string | null
  chooseBuilding: (form: FormData) => Promise<void>
  signOutHere: () => Promise<void>
  signOutEverywhere: () => Promise<void>
}

/** Who is signed in, the building to work on, light or dark, and the ways out. */
export function PersonPanel(props: PersonPanelProps) {
  return (
    <div className="grid gap-4 text-2 max-md:border-t max-md:border-ink max-md:pt-3">
      <p>
        <b className="text-3">{props.name}</b>
        <br />
        <span className="text-ink-2">{props.roleWords}</span>
        <br />
        <span className="text-ink-3">{props.email}</span>
      </p>
      {props.buildings.length > 1 && (
        <form action={props.chooseBuilding} className="grid gap-1">
          <p className="font-[600]">Building</p>
          {props.buildings.map((building) => (
            <button
              type="submit"
              key={building.slug}
              name="building"
              value={building.slug}
              aria-current={building.current ? 'true' : undefined}
              className="min-h-[32px] text-left underline decoration-edge underline-offset-[3px] aria-[current]:font-[650] aria-[current]:no-underline max-sm:min-h-[44px]"
            >
              {building.name}
            </button>
          ))}
        </form>
      )}
      <ThemeSwitch theme={props.theme} />
      {props.mailboxHref && (
        <a href={props.mailboxHref} className="w-fit">
          Local mailbox
        </a>
      )}
      <div className="flex flex-wrap items-center gap-[14px]">
        <form action={props.signOutHere}>
          <Button type="submit" size="small">
            Sign out
          </Button>
        </form>
        <form action={props.signOutEverywhere}>
          <Button type="submit" size="small" look="text">
            Sign out everywhere
          </Button>
        </form>
      </div>
    </div>
  )
}

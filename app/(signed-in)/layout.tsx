import { cookies } from 'next/headers'
import { Masthead } from '@/components/layout/Masthead'
import { LiveRoot } from '@/components/live/LiveRoot'
import { THEME_COOKIE, themeOf } from '@/lib/format/theme'
import { paths } from '@/lib/paths'
import { firstPageOf, navigationFor, ROLE_WORDS } from '@/lib/policy/navigation'
import { can } from '@/lib/policy/permissions'
import { systemClock } from '@/lib/server/clock'
import { env } from '@/lib/server/env'
import { pageContext } from '@/lib/server/http/page'
import { chooseBuilding, signOutEverywhere, signOutHere } from './person-actions'

/** Masthead and live connection round every page of a signed-in person. It draws and never protects: each page asks for itself. */
export default async function SignedInLayout({ children }: { children: React.ReactNode }) {
  const page = await pageContext()
  if (!page) return children
  const { roles } = page.membership
  const theme = themeOf((await cookies()).get(THEME_COOKIE)?.value)
  return (
    <LiveRoot key={page.sessionId}>
      <Masthead
        home={firstPageOf(roles)}
        navigation={navigationFor(roles)}
        building={page.building}
        nowS={systemClock.now().getTime() / 1000}
        theme={theme}
        name={page.person.name}
        email={page.person.email}
        roleWords={roles.map((role) => ROLE_WORDS[role]).join(', ')}
        buildings={page.buildings.map(({ name, slug }) => ({
          name,
          slug,
          current: slug === page.building?.slug,
        }))}
        mailboxHref={env().EBBMARK_DEMO && can(roles, 'mailbox.read') ? paths.mailbox() : null}
        chooseBuilding={chooseBuilding}
        signOutHere={signOutHere}
        signOutEverywhere={signOutEverywhere}
      />
      {children}
    </LiveRoot>
  )
}

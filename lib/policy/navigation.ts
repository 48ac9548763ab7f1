import { paths } from '@/lib/paths'
import { can, type Permission } from './permissions'
import type { Role } from './roles'

export type NavigationItem = { readonly href: string; readonly word: string }

type Entry = NavigationItem & { readonly permission: Permission; readonly for: readonly Role[] }

/** The words of the masthead in reading order, and for whose work each stands there. */
const entries: readonly Entry[] = [
  { href: paths.rounds(), word: 'Rounds', permission: 'rounds.read', for: ['operator', 'administrator'] },
  {
    href: paths.airChange(),
    word: 'Air change',
    permission: 'air-change.read',
    for: ['engineer', 'administrator'],
  },
  { href: paths.decays(), word: 'Decays', permission: 'decay.read', for: ['engineer'] },
  {
    href: paths.digests(),
    word: 'Digests',
    permission: 'digest.read',
    for: ['tenant', 'operator', 'administrator'],
  },
  {
    href: paths.rooms(),
    word: 'Rooms',
    permission: 'room.read',
    for: ['operator', 'engineer', 'tenant', 'administrator'],
  },
  {
    href: paths.sensors(),
    word: 'Sensors',
    permission: 'sensor.read',
    for: ['installer', 'operator', 'engineer', 'administrator'],
  },
  {
    href: paths.registerSensor(),
    word: 'Register',
    permission: 'sensor.register',
    for: ['installer'],
  },
  { href: paths.feeds(), word: 'Feeds', permission: 'settings.manage', for: ['administrator'] },
]

/** What the masthead shows to someone with these roles: only what they may use. */
export function navigationFor(roles: readonly Role[]): NavigationItem[] {
  return entries
    .filter((entry) => can(roles, entry.permission) && entry.for.some((role) => roles.includes(role)))
    .map(({ href, word }) => ({ href, word }))
}

/** Where each role's work begins; someone with several roles starts at the first of this list. */
const firstPages: readonly (readonly [Role, string])[] = [
  ['operator', paths.rounds()],
  ['engineer', paths.airChange()],
  ['administrator', paths.rounds()],
  ['installer', paths.sensors()],
  ['tenant', paths.digests()],
]

/** The page that opens after sign-in. */
export function firstPageOf(roles: readonly Role[]): string {
  return firstPages.find(([role]) => roles.includes(role))?.[1] ?? paths.signIn()
}

/** How a person is named beside their name: the roles in words. */
export const ROLE_WORDS: Readonly<Record<Role, string>> = {
  administrator: 'Administrator',
  operator: 'Operator',
  engineer: 'Energy engineer',
  installer: 'Installer',
  tenant: 'Tenant',
}

/** Several roles as one phrase: "Operator and energy engineer". */
export function rolesInWords(roles: readonly Role[]): string {
  const words = roles.map((role) => ROLE_WORDS[role])
  const [first = '', ...rest] = words
  return [first, ...rest.map((word) => word.toLowerCase())].join(' and ')
}

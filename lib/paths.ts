const part = (id: string) => encodeURIComponent(id)

/** The address of every page and handler in one place; ids are public ids, weeks and dates are ISO dates. */
export const paths = {
  home: () => '/',
  signIn: (next?: string) => (next ? `/sign-in?next=${encodeURIComponent(next)}` : '/sign-in'),
  rounds: () => '/rounds',
  wall: () => '/rounds/wall',
  rooms: () => '/rooms',
  room: (room: string) => `/rooms/${part(room)}`,
  airChange: () => '/air-change',
  decays: () => '/decays',
  decaysOf: (room: string) => `/decays?room=${part(room)}&show=all`,
  decay: (decay: string) => `/decays/${part(decay)}`,
  sensors: () => '/sensors',
  registerSensor: () => '/sensors/register',
  sensor: (sensor: string) => `/sensors/${part(sensor)}`,
  digests: () => '/digests',
  digest: (digest: string) => `/digests/${part(digest)}`,
  mailbox: () => '/mailbox',
  feeds: () => '/settings/feeds',
  newFeed: () => '/settings/feeds/new',
  feed: (feed: string) => `/settings/feeds/${part(feed)}`,
  api: {
    health: () => '/api/health',
    live: () => '/api/v1/live',
    airChange: () => '/api/v1/air-change',
    firstReading: (sensor: string) => `/api/v1/sensors/${part(sensor)}/first-reading`,
  },
} as const

/**
 * The page asked for before sign-in, if it is a page of this site; else null, so that no link from outside can send a person elsewhere.
 */
export function safeNext(next: string | null | undefined): string | null {
  if (!next?.startsWith('/') || next.startsWith('//') || /[\\\s]/.test(next)) return null
  const url = new URL(next, 'http://site.invalid')
  if (url.origin !== 'http://site.invalid') return null
  const elsewhere = ['/api', '/sign-in', '/_next'].some(
    (own) => url.pathname === own || url.pathname.startsWith(`${own}/`),
  )
  return elsewhere ? null : `${url.pathname}${url.search}`
}

import type { Role } from '@/lib/policy/roles'

/**
 * Who may use what, written by hand from the four users' jobs and never read from the permission table: a page, handler or action that
 * is not here, or one here that is gone, fails the matrix.
 */
export type Holders = readonly Role[] | 'open' | 'api-key'

const everyone: Holders = ['administrator', 'operator', 'engineer', 'installer', 'tenant']
const rounds: Holders = ['administrator', 'operator']
const rooms: Holders = ['administrator', 'operator', 'engineer', 'tenant']
const rates: Holders = ['administrator', 'engineer']
const sensors: Holders = ['administrator', 'operator', 'engineer', 'installer']
const registering: Holders = ['administrator', 'installer']
const reviewing: Holders = ['engineer']
const digests: Holders = ['administrator', 'operator', 'tenant']
const sending: Holders = ['administrator', 'operator']
const mailbox: Holders = ['administrator', 'operator']
const settings: Holders = ['administrator']

/** Programs with an API key alone: no person's session counts, so every person is told 401. */
const programs: Holders = 'api-key'

export const EXPECTED_PAGES: Record<string, Holders> = {
  '/': 'open',
  '/sign-in': 'open',
  '/rounds': rounds,
  '/rounds/wall': rounds,
  '/rooms': rooms,
  '/rooms/[room]': rooms,
  '/air-change': rates,
  '/decays': rates,
  '/decays/[decay]': rates,
  '/sensors': sensors,
  '/sensors/[sensor]': sensors,
  '/sensors/register': registering,
  '/digests': digests,
  '/digests/[digest]': digests,
  '/mailbox': mailbox,
  '/settings/feeds': settings,
  '/settings/feeds/new': settings,
  '/settings/feeds/[feed]': settings,
}

export const EXPECTED_ROUTES: Record<string, Holders> = {
  'GET /api/auth/[...nextauth]': 'open',
  'POST /api/auth/[...nextauth]': 'open',
  'GET /api/health': 'open',
  'GET /api/metrics': 'open',
  'GET /api/v1/air-change': rates,
  'GET /api/v1/buildings': rooms,
  'GET /api/v1/decays': rates,
  'GET /api/v1/digests': digests,
  'GET /api/v1/live': everyone,
  'GET /api/v1/readings': rooms,
  'POST /api/v1/readings': programs,
  'GET /api/v1/rooms': rooms,
  'GET /api/v1/rooms/[room]': rooms,
  'GET /api/v1/sensors': sensors,
  'GET /api/v1/sensors/[sensor]/first-reading': sensors,
}

/** `answers` is false where an action gives no words back but leads elsewhere; what it does is then tested by itself. */
export const EXPECTED_ACTIONS: Record<string, { holders: Holders; answers: boolean }> = {
  '(open)/sign-in/actions.ts#signIn': { holders: 'open', answers: true },
  '(open)/sign-in/actions.ts#signInAsDemoPerson': { holders: 'open', answers: true },
  '(signed-in)/person-actions.ts#signOutHere': { holders: everyone, answers: false },
  '(signed-in)/person-actions.ts#signOutEverywhere': { holders: everyone, answers: false },
  '(signed-in)/person-actions.ts#chooseBuilding': { holders: everyone, answers: false },
  '(signed-in)/decays/actions.ts#reviewDecayAction': { holders: reviewing, answers: true },
  '(signed-in)/digests/actions.ts#sendDigestAction': { holders: sending, answers: true },
  '(signed-in)/settings/feeds/actions.ts#removeFeedAction': { holders: settings, answers: true },
  '(signed-in)/settings/feeds/actions.ts#saveFeedAction': { holders: settings, answers: true },
  '(signed-in)/settings/feeds/actions.ts#tryNewFeedAction': { holders: settings, answers: true },
  '(signed-in)/settings/feeds/actions.ts#tryFeedAction': { holders: settings, answers: true },
  '(signed-in)/settings/feeds/actions.ts#switchFeedAction': { holders: settings, answers: true },
  '(signed-in)/sensors/actions.ts#registerSensorAction': { holders: registering, answers: true },
  '(signed-in)/sensors/actions.ts#renewSecretAction': { holders: registering, answers: true },
  '(signed-in)/sensors/actions.ts#retireSensorAction': { holders: registering, answers: true },
}

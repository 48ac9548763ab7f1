import { sql } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { ROLES, type Role } from '@/lib/policy/roles'
import { actionsOfApp, type BuiltAction, builtActions, pagesOfApp, routesOfApp } from '../../support/app-tree'
import { createTestDatabase, type TestDatabase } from '../../support/database'
import { makeSmallOrganization, SMALL_PASSWORD, type SmallOrganization } from '../../support/small-building'
import { addSmallFeed } from '../../support/small-feed'
import { addSmallResults, type SmallResults } from '../../support/small-results'
import { signInOverHttp, startWeb, TEST_WEB_DIST, type TestWeb } from '../../support/web'
import { EXPECTED_ACTIONS, EXPECTED_PAGES, EXPECTED_ROUTES, type Holders } from './expected'

/**
 * Every page, handler and action of the application, called over HTTP with each role's real cookie and with none. What must come of it
 * stands in expected.ts, written by hand; nothing here asks the permission table.
 */
type Caller = Role | 'nobody'
const CALLERS: readonly Caller[] = ['nobody', ...ROLES]

let db: TestDatabase
let web: TestWeb
let mill: SmallOrganization
let other: SmallOrganization
let results: SmallResults
let built: BuiltAction[]
let feedId: string
const cookies = new Map<Caller, string>([['nobody', '']])

beforeAll(async () => {
  db = await createTestDatabase()
  mill = await makeSmallOrganization(db.database, 'mill')
  other = await makeSmallOrganization(db.database, 'other')
  results = await addSmallResults(db.database, mill)
  feedId = await addSmallFeed(db.database, mill)
  web = await startWeb({ databaseUrl: db.appUrl, env: { EBBMARK_DEMO: '1' } })
  built = builtActions(TEST_WEB_DIST)
  for (const role of ROLES) {
    const { jar, error } = await signInOverHttp(web, { email: mill.people[role], password: SMALL_PASSWORD })
    expect(error).toBeNull()
    cookies.set(role, jar.header)
  }
})
afterAll(async () => {
  await web?.stop()
  await db?.drop()
})

/** The address with real things in the place of its parameters. */
const filled = (pattern: string): string =>
  pattern
    .replace('[room]', mill.rooms.hall.publicId)
    .replace('[sensor]', mill.rooms.hall.deviceId)
    .replace('[decay]', results.decayPublicId)
    .replace('[digest]', results.digestPublicId)
    .replace('[feed]', feedId)
    .replace('[...nextauth]', 'csrf')

const call = async (caller: Caller, path: string, init: RequestInit = {}) => {
  const ended = new AbortController()
  const headers = { ...init.headers, Cookie: cookies.get(caller) ?? '' }
  const response = await fetch(`${web.url}${path}`, {
    redirect: 'manual',
    ...init,
    headers,
    signal: ended.signal,
  })
  const streams = response.headers.get('content-type')?.startsWith('text/event-stream')
  const body = streams ? '' : await response.text()
  ended.abort()
  return {
    status: response.status,
    location: response.headers.get('location'),
    body,
    headers: response.headers,
  }
}

const holds = (holders: Holders, caller: Caller) =>
  holders === 'open' || (holders !== 'api-key' && caller !== 'nobody' && holders.includes(caller))

describe('the expected table names exactly what the application has:', () => {
  test('pages', () => expect(pagesOfApp().sort()).toEqual(Object.keys(EXPECTED_PAGES).sort()))
  test('handlers', () => expect(routesOfApp().sort()).toEqual(Object.keys(EXPECTED_ROUTES).sort()))
  test('actions', () => expect(actionsOfApp().sort()).toEqual(Object.keys(EXPECTED_ACTIONS).sort()))
  test('actions that the build knows', () => {
    const known = new Set(built.map(({ key }) => key))
    expect([...known].filter((key) => !(key in EXPECTED_ACTIONS))).toEqual([])
  })
})

describe('pages', () => {
  const guarded = Object.entries(EXPECTED_PAGES).filter(([, holders]) => holders !== 'open')

  test.each(guarded)('%s', async (pattern, holders) => {
    const path = filled(pattern)
    for (const caller of CALLERS) {
      const { status, location } = await call(caller, path)
      const expected =
        caller === 'nobody'
          ? [307, `/sign-in?next=${encodeURIComponent(path)}`]
          : [holds(holders, caller) ? 200 : 403, null]
      expect([caller, status, location]).toEqual([caller, ...expected])
    }
  })

  test('that are open lead each role to its work, and nobody to sign-in', async () => {
    const works = {
      administrator: '/rounds',
      operator: '/rounds',
      engineer: '/air-change',
      installer: '/sensors',
    }
    for (const [role, page] of Object.entries({ ...works, tenant: '/digests' })) {
      for (const path of ['/', '/sign-in']) {
        expect((await call(role as Role, path)).location, `${role} at ${path}`).toBe(page)
      }
    }
    expect((await call('nobody', '/')).location).toBe('/sign-in')
    expect((await call('nobody', '/sign-in')).status).toBe(200)
  })
})

describe('handlers', () => {
  test.each(Object.entries(EXPECTED_ROUTES))('%s', async (key, holders) => {
    const [method = '', pattern = ''] = key.split(' ')
    for (const caller of CALLERS) {
      const { status, body, headers } = await call(caller, filled(pattern), { method })
      if (holds(holders, caller)) {
        expect([401, 403, 500], `${caller}: ${body.slice(0, 300)}`).not.toContain(status)
        continue
      }
      const isUnknown = caller === 'nobody' || holders === 'api-key'
      expect([caller, status]).toEqual([caller, isUnknown ? 401 : 403])
      expect(headers.get('content-type')).toBe('application/problem+json')
      expect(JSON.parse(body)).toMatchObject({ status, title: expect.any(String), instance: filled(pattern) })
    }
  })

  const writes = Object.entries(EXPECTED_ROUTES)
    .filter(([key, holders]) => !/^GET|auth/.test(key) && holders !== 'api-key')
    .map(([key]) => key)
  test.runIf(writes.length > 0).each(writes)('%s refuses a write from another site', async (key) => {
    const [method = '', pattern = ''] = key.split(' ')
    const from = { Origin: 'https://elsewhere.example' }
    expect((await call('administrator', filled(pattern), { method, headers: from })).status).toBe(403)
  })
})

describe('actions', () => {
  const post = (caller: Caller, { id, page }: BuiltAction, headers = {}) =>
    call(caller, filled(page), {
      method: 'POST',
      headers: { 'Next-Action': id, 'Content-Type': 'text/plain;charset=UTF-8', ...headers },
      body: '[{}]',
    })
  const find = (key: string) => {
    const action = built.find((each) => each.key === key)
    if (!action) throw new Error(`the build has no action ${key}`)
    return action
  }
  const answering = Object.entries(EXPECTED_ACTIONS).filter(([, { answers }]) => answers)

  test.each(answering)('%s', async (key, { holders }) => {
    for (const caller of CALLERS) {
      const { body } = await post(caller, find(key))
      const refused = /"kind":"(not-signed-in|not-allowed)"/.exec(body)?.[1] ?? 'admitted'
      const expected = caller === 'nobody' ? 'not-signed-in' : 'not-allowed'
      expect([caller, refused]).toEqual([caller, holds(holders, caller) ? 'admitted' : expected])
      if (holds(holders, caller)) expect(body).toMatch(/"ok":(false,"kind":"invalid"|true)/)
    }
  })

  test('are refused when another site’s page sends them', async () => {
    const action = find('(signed-in)/person-actions.ts#signOutEverywhere')
    const { status } = await post('operator', action, { Origin: 'https://elsewhere.example' })
    expect(status).toBe(500)
    expect((await call('operator', '/sensors')).status).toBe(200)
  })

  test('sign out here ends one session, everywhere ends every one and writes it down', async () => {
    const email = mill.people.duty
    const enter = async () => (await signInOverHttp(web, { email, password: SMALL_PASSWORD })).jar.header
    const [first, second, third] = [await enter(), await enter(), await enter()]
    const inside = async (cookie: string) =>
      (await fetch(`${web.url}/sensors`, { headers: { Cookie: cookie }, redirect: 'manual' })).status === 200
    const leave = (cookie: string, name: string) =>
      fetch(`${web.url}/sensors`, {
        method: 'POST',
        redirect: 'manual',
        headers: { Cookie: cookie, 'Next-Action': find(`(signed-in)/person-actions.ts#${name}`).id },
        body: '[]',
      })
    await leave(first, 'signOutHere')
    expect(await Promise.all([first, second, third].map(inside))).toEqual([false, true, true])
    await leave(second, 'signOutEverywhere')
    expect(await Promise.all([first, second, third].map(inside))).toEqual([false, false, false])
    const trail = await db.database.asSystem('test', (tx) =>
      tx.execute(
        sql`SELECT a.action FROM audit_events a JOIN users u ON u.id = a.user_id WHERE u.email = ${email}`,
      ),
    )
    expect(trail.rows).toEqual([{ action: 'person.signed-out-everywhere' }])
  })
})

describe('what is not theirs looks as if it were not there:', () => {
  test('a room of another organisation, to each role that may open rooms', async () => {
    for (const role of ['administrator', 'operator', 'engineer', 'tenant'] as const) {
      expect((await call(role, `/rooms/${other.rooms.hall.publicId}`)).status, role).toBe(404)
      expect((await call(role, `/api/v1/rooms/${other.rooms.hall.publicId}`)).status, role).toBe(404)
    }
  })

  test('a room that the tenancy does not hold, to its tenant', async () => {
    expect((await call('tenant', `/rooms/${mill.rooms.spare.publicId}`)).status).toBe(404)
    expect((await call('tenant', `/api/v1/rooms/${mill.rooms.spare.publicId}`)).status).toBe(404)
    expect((await call('operator', `/rooms/${mill.rooms.spare.publicId}`)).status).toBe(200)
  })

  test('a sensor of another organisation', async () => {
    for (const role of ['administrator', 'operator', 'engineer', 'installer'] as const) {
      expect((await call(role, `/sensors/${other.rooms.hall.deviceId}`)).status, role).toBe(404)
    }
  })

  test('a feed, to another organisation’s administrator', async () => {
    const email = other.people.administrator
    const { jar } = await signInOverHttp(web, { email, password: SMALL_PASSWORD })
    const ask = (path: string) => fetch(`${web.url}${path}`, { headers: { Cookie: jar.header } })
    expect((await ask(`/settings/feeds/${feedId}`)).status).toBe(404)
    expect(await (await ask('/settings/feeds')).text()).not.toContain(feedId)
  })

  test('lists name nothing of another organisation, nor rooms a tenant does not hold', async () => {
    for (const role of ['administrator', 'operator', 'engineer', 'tenant'] as const) {
      const { body } = await call(role, '/api/v1/rooms')
      for (const room of Object.values(other.rooms)) expect(body).not.toContain(room.publicId)
      expect(body.includes(mill.rooms.spare.publicId), role).toBe(role !== 'tenant')
    }
  })

  test('a tenancy’s digest, to another organisation’s tenant', async () => {
    const email = other.people.tenant
    const { jar } = await signInOverHttp(web, { email, password: SMALL_PASSWORD })
    const digest = await fetch(`${web.url}/digests/${results.digestPublicId}`, {
      headers: { Cookie: jar.header },
    })
    expect(digest.status).toBe(404)
  })
})

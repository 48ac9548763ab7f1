import { sql } from 'drizzle-orm'
import { encode } from 'next-auth/jwt'
import pg from 'pg'
import { afterAll, beforeAll, beforeEach, describe, expect, test } from 'vitest'
import { createTestDatabase, type TestDatabase } from '../support/database'
import { makeSmallOrganization, SMALL_PASSWORD, type SmallOrganization } from '../support/small-building'
import { type CookieJar, signInOverHttp, startWeb, TEST_AUTH_SECRET, type TestWeb } from '../support/web'

let db: TestDatabase
let mill: SmallOrganization
let web: TestWeb

beforeAll(async () => {
  db = await createTestDatabase()
  mill = await makeSmallOrganization(db.database, 'mill')
  web = await startWeb({ databaseUrl: db.appUrl })
})
afterAll(async () => {
  await web?.stop()
  await db?.drop()
})
beforeEach(() => run(sql`DELETE FROM sign_in_events`))

const run = (query: ReturnType<typeof sql>) =>
  db.database.asSystem('test', async (tx) => (await tx.execute(query)).rows as Record<string, unknown>[])

const signIn = (email: string, password = SMALL_PASSWORD, headers = {}) =>
  signInOverHttp(web, { email, password }, headers)

/** Who the server says is signed in with these cookies. */
const whoIs = async (jar: CookieJar | string): Promise<string | null> => {
  const cookie = typeof jar === 'string' ? jar : jar.header
  const response = await fetch(`${web.url}/api/auth/session`, { headers: { Cookie: cookie } })
  const body = (await response.json()) as { user?: { email: string } }
  return body.user?.email ?? null
}

/** Where the bare address leads with these cookies: a page of work, or sign-in. */
const leadsTo = async (jar: CookieJar): Promise<string | null> => {
  const response = await fetch(`${web.url}/`, { headers: { Cookie: jar.header }, redirect: 'manual' })
  return response.headers.get('location')
}

/** The outcome column of every attempt, oldest first. */
const outcomes = async () =>
  (await run(sql`SELECT outcome FROM sign_in_events ORDER BY id`)).map((row) => row.outcome)

describe('signing in', () => {
  test('with e-mail (in any case) and password opens a session and writes it down', async () => {
    const { jar, error } = await signIn('Engineer@MILL.example')
    expect(error).toBeNull()
    expect(await whoIs(jar)).toBe(mill.people.engineer)
    expect(await leadsTo(jar)).toBe('/air-change')
    const [event] = await run(
      sql`SELECT email, outcome, host(address) AS address, user_id FROM sign_in_events`,
    )
    expect(event).toMatchObject({
      email: 'engineer@mill.example',
      outcome: 'signed-in',
      address: '127.0.0.1',
    })
    const [session] = await run(
      sql`SELECT expires_at - created_at AS lasts, revoked_at FROM sessions ORDER BY created_at DESC`,
    )
    expect(session).toMatchObject({ lasts: '14 days', revoked_at: null })
  })

  test('answers a wrong password and an unknown e-mail alike, down to the bytes', async () => {
    const answer = async (email: string) => {
      const { error, location, jar } = await signIn(email, 'not the password')
      return { error, location, session: jar.get('next-auth.session-token') }
    }
    const wrong = await answer(mill.people.operator)
    expect(wrong.error).toBe('wrong')
    expect(wrong.session).toBeUndefined()
    expect(await answer('nobody@mill.example')).toEqual(wrong)
    expect(await outcomes()).toEqual(['wrong', 'wrong'])
  })

  test('refuses someone without a role in any organisation in the same words', async () => {
    await run(sql`INSERT INTO users (public_id, email, name, password_hash)
      SELECT 'gone', 'gone@mill.example', 'Gone', password_hash FROM users WHERE email = ${mill.people.operator}`)
    expect((await signIn('gone@mill.example')).error).toBe('wrong')
  })

  test('needs next-auth’s own CSRF token', async () => {
    const response = await fetch(`${web.url}/api/auth/callback/credentials`, {
      method: 'POST',
      redirect: 'manual',
      headers: { 'Content-Type': 'application/x-www-form-urlencoded' },
      body: new URLSearchParams({ email: mill.people.operator, password: SMALL_PASSWORD }).toString(),
    })
    expect(response.headers.getSetCookie().join()).not.toContain('session-token')
    expect(await outcomes()).toEqual([])
  })

  test('keeps passwords as argon2id with 19 MiB and 2 passes', async () => {
    const [row] = await run(sql`SELECT password_hash AS hash FROM users WHERE email = ${mill.people.tenant}`)
    expect(row?.hash).toMatch(/^\$argon2id\$v=19\$m=19456,t=2,p=1\$/)
  })
})

describe('the form itself, without any script', () => {
  test('shows the words, keeps the e-mail and never the password; then lets in and leads on', async () => {
    const page = `${web.url}/sign-in?next=${encodeURIComponent('/decays/k7')}`
    const post = async (password: string) => {
      const html = await (await fetch(page)).text()
      const form = new FormData()
      for (const [, name, value] of html.matchAll(
        /<input type="hidden" name="([^"]*)"(?: value="([^"]*)")?/g,
      )) {
        form.set(name ?? '', (value ?? '').replaceAll('&quot;', '"').replaceAll('&amp;', '&'))
      }
      form.set('email', mill.people.engineer)
      form.set('password', password)
      return fetch(page, { method: 'POST', body: form, redirect: 'manual' })
    }
    const refused = await post('not the password')
    const html = await refused.text()
    expect(html).toContain('E-mail and password do not go together.')
    expect(html).toContain(`value="${mill.people.engineer}"`)
    expect(html).not.toContain('not the password')
    const admitted = await post(SMALL_PASSWORD)
    expect(admitted.status).toBe(303)
    expect(admitted.headers.get('location')).toBe('/decays/k7')
    const cookie = admitted.headers.getSetCookie().find((line) => line.includes('session-token')) ?? ''
    expect(cookie).toMatch(/HttpOnly/i)
    expect(cookie).toMatch(/SameSite=lax/i)
    expect(await whoIs(cookie.split(';')[0] ?? '')).toBe(mill.people.engineer)
  })

  test('offers no demo sign-in where there is no demo', async () => {
    expect(await (await fetch(`${web.url}/sign-in`)).text()).not.toContain('look around the demo')
  })
})

describe('too many tries', () => {
  test('for one e-mail: after five wrong ones even the right password waits, others do not', async () => {
    for (let i = 0; i < 5; i++) expect((await signIn(mill.people.installer, 'wrong')).error).toBe('wrong')
    const sixth = await signIn(mill.people.installer)
    expect(sixth.error).toMatch(/^wait-(29\d|300)$/)
    expect(sixth.jar.get('next-auth.session-token')).toBeUndefined()
    expect(await outcomes()).toEqual(['wrong', 'wrong', 'wrong', 'wrong', 'wrong', 'limited'])
    const words = await (await fetch(`${web.url}/sign-in?error=${sixth.error}`)).text()
    expect(words).toContain('Too many wrong tries. The next one is possible in 5 minutes.')
    expect((await signIn(mill.people.operator)).error).toBeNull()
    await run(sql`UPDATE sign_in_events SET at = at - interval '301 seconds'`)
    expect((await signIn(mill.people.installer)).error).toBeNull()
  })

  test('an unknown e-mail is limited just so', async () => {
    for (let i = 0; i < 5; i++) await signIn('nobody@mill.example', 'wrong')
    expect((await signIn('nobody@mill.example', 'wrong')).error).toMatch(/^wait-/)
  })

  test('tries at the same moment are counted one by one', async () => {
    const tries = Array.from({ length: 12 }, () => signIn(mill.people.tenant, 'wrong'))
    const errors = (await Promise.all(tries)).map(({ error }) => error)
    expect(errors.filter((error) => error === 'wrong')).toHaveLength(5)
    expect(errors.filter((error) => error?.startsWith('wait-'))).toHaveLength(7)
  })

  test('a good sign-in wipes the earlier wrong ones', async () => {
    for (let i = 0; i < 4; i++) await signIn(mill.people.operator, 'wrong')
    expect((await signIn(mill.people.operator)).error).toBeNull()
    for (let i = 0; i < 4; i++) expect((await signIn(mill.people.operator, 'wrong')).error).toBe('wrong')
    expect((await signIn(mill.people.operator)).error).toBeNull()
  })

  test('from one address: after thirty wrong ones, whatever the e-mail', async () => {
    await run(sql`INSERT INTO sign_in_events (email, address, outcome)
      SELECT 'someone' || n || '@mill.example', '127.0.0.1', 'wrong' FROM generate_series(1, 30) n`)
    expect((await signIn(mill.people.operator)).error).toMatch(/^wait-/)
    const elsewhere = { 'X-Forwarded-For': '198.51.100.7' }
    expect((await signIn(mill.people.operator, SMALL_PASSWORD, elsewhere)).error).toBeNull()
  })
})

describe('a session', () => {
  test('ends for its own cookie at next-auth’s sign-out; another of the same person stands', async () => {
    const first = (await signIn(mill.people.duty)).jar
    const second = (await signIn(mill.people.duty)).jar
    const kept = first.header
    const csrf = await fetch(`${web.url}/api/auth/csrf`, { headers: { Cookie: first.header } })
    const { csrfToken } = (await csrf.json()) as { csrfToken: string }
    await fetch(`${web.url}/api/auth/signout`, {
      method: 'POST',
      redirect: 'manual',
      headers: { Cookie: first.header, 'Content-Type': 'application/x-www-form-urlencoded' },
      body: new URLSearchParams({ csrfToken }).toString(),
    })
    expect(await whoIs(kept)).toBeNull()
    expect(await whoIs(second)).toBe(mill.people.duty)
    expect(await outcomes()).toEqual(['signed-in', 'signed-in', 'signed-out'])
  })

  test('of a person whose version rose, or that expired, or that was revoked, is worth nothing', async () => {
    const endings = [
      sql`UPDATE users SET version = version + 1 WHERE email = ${mill.people.duty}`,
      sql`UPDATE sessions SET expires_at = now() - interval '1 second'`,
      sql`UPDATE sessions SET revoked_at = now()`,
    ]
    for (const ending of endings) {
      const { jar } = await signIn(mill.people.duty)
      expect(await leadsTo(jar)).toBe('/rounds')
      await run(ending)
      expect(await whoIs(jar)).toBeNull()
      expect(await leadsTo(jar)).toBe('/sign-in')
    }
  })

  test('of a person whose last role was taken is worth nothing', async () => {
    const { jar } = await signIn(mill.people.installer)
    expect(await leadsTo(jar)).toBe('/sensors')
    const ofInstaller = sql`(SELECT id FROM users WHERE email = ${mill.people.installer})`
    await run(sql`UPDATE memberships SET roles = '{}' WHERE user_id = ${ofInstaller}`)
    expect(await leadsTo(jar)).toBe('/sign-in')
    await run(sql`UPDATE memberships SET roles = '{installer}' WHERE user_id = ${ofInstaller}`)
    expect(await leadsTo(jar)).toBe('/sensors')
  })

  test('cannot be forged: another key, another person’s word, or no known session id', async () => {
    await signIn(mill.people.administrator)
    const [row] = await run(sql`SELECT id FROM sessions WHERE revoked_at IS NULL LIMIT 1`)
    const seal = (token: Record<string, unknown>, secret: string) =>
      encode({ token, secret }).then((value) => `next-auth.session-token=${value}`)
    const right = await seal({ sid: row?.id }, TEST_AUTH_SECRET)
    expect(await whoIs(right)).not.toBeNull()
    expect(await whoIs(await seal({ sid: row?.id }, 'another secret, just as long as it must be'))).toBeNull()
    const unknown = '00000000-0000-4000-8000-000000000000'
    expect(await whoIs(await seal({ sid: unknown }, TEST_AUTH_SECRET))).toBeNull()
    expect(await whoIs(await seal({ sid: `${unknown}' OR true` }, TEST_AUTH_SECRET))).toBeNull()
    expect(await whoIs(await seal({ email: mill.people.administrator }, TEST_AUTH_SECRET))).toBeNull()
    expect(await whoIs('next-auth.session-token=rubbish')).toBeNull()
  })
})

test('ending sessions is told to open streams', async () => {
  const listener = new pg.Client({ connectionString: db.appUrl })
  await listener.connect()
  const heard: string[] = []
  listener.on('notification', ({ payload }) => heard.push(payload ?? ''))
  await listener.query('LISTEN ebbmark_live')
  const { jar } = await signIn(mill.people.operator)
  const csrf = await fetch(`${web.url}/api/auth/csrf`, { headers: { Cookie: jar.header } })
  const { csrfToken } = (await csrf.json()) as { csrfToken: string }
  await fetch(`${web.url}/api/auth/signout`, {
    method: 'POST',
    redirect: 'manual',
    headers: { Cookie: jar.header, 'Content-Type': 'application/x-www-form-urlencoded' },
    body: new URLSearchParams({ csrfToken }).toString(),
  })
  await listener.query('SELECT 1')
  await listener.end()
  expect(heard.map((payload) => JSON.parse(payload))).toEqual([{ v: 1, kind: 'session', buildings: 'many' }])
})

test('/api/health says what is not well, and 200 when all is', async () => {
  const health = async () => {
    const response = await fetch(`${web.url}/api/health`)
    const body = (await response.json()) as { parts: Record<string, { well: boolean }> }
    return [
      response.status,
      ...Object.entries(body.parts).flatMap(([name, { well }]) => (well ? [] : [name])),
    ]
  }
  expect(await health()).toEqual([503, 'broker'])
  await run(
    sql`INSERT INTO worker_heartbeats (id, kind, started_at, at) VALUES ('b', 'broker', now(), now())`,
  )
  expect(await health()).toEqual([200])
  await run(sql`UPDATE worker_heartbeats SET at = now() - interval '31 seconds'`)
  expect(await health()).toEqual([503, 'broker'])
  await run(sql`UPDATE worker_heartbeats SET at = now()`)
  await run(sql`UPDATE buildings SET created_at = now() - interval '9 days'`)
  expect(await health()).toEqual([503, 'lastNight'])
  const night = (state: string, hash: string) =>
    run(sql`INSERT INTO night_runs (organization_id, building_id, local_date, method_version, input_hash, state, provisional, started_at)
      SELECT organization_id, id, (now() AT TIME ZONE time_zone)::date - 1, 'v', ${hash}, ${state}, true, now() FROM buildings`)
  await night('failed', 'a')
  expect(await health()).toEqual([503, 'lastNight'])
  await night('done', 'b')
  expect(await health()).toEqual([200])
})

import { afterAll, beforeAll, expect, test } from 'vitest'
import { builtActions } from '../support/app-tree'
import { createTestDatabase, type TestDatabase } from '../support/database'
import { makeSmallOrganization, SMALL_PASSWORD, type SmallOrganization } from '../support/small-building'
import { signInOverHttp, startWeb, TEST_WEB_DIST, type TestWeb } from '../support/web'

let db: TestDatabase
let mill: SmallOrganization
let web: TestWeb

beforeAll(async () => {
  db = await createTestDatabase()
  mill = await makeSmallOrganization(db.database, 'mill')
  web = await startWeb({ databaseUrl: db.appUrl })
})
afterAll(() => db?.drop())

const enter = async (email: string) =>
  (await signInOverHttp(web, { email, password: SMALL_PASSWORD })).jar.header

/** Opens the live stream and waits for its first words; `ended` resolves when the server closes it. */
async function openStream(cookie: string): Promise<{ ended: Promise<void>; isOpen: () => boolean }> {
  const response = await fetch(`${web.url}/api/v1/live`, { headers: { Cookie: cookie } })
  expect(response.status).toBe(200)
  expect(response.headers.get('content-encoding')).toBeNull()
  const reader = response.body?.getReader()
  if (!reader) throw new Error('the stream has no body')
  expect((await reader.read()).done).toBe(false)
  let open = true
  const drain = async () => {
    try {
      while (!(await reader.read()).done);
    } catch {
      // closed by the server's end
    }
    open = false
  }
  return { ended: drain(), isOpen: () => open }
}

test('signing out everywhere closes the open streams of that person and of nobody else', async () => {
  const [duty, second, operator] = [
    await enter(mill.people.duty),
    await enter(mill.people.duty),
    await enter(mill.people.operator),
  ]
  const streams = [await openStream(duty), await openStream(second)] as const
  const others = await openStream(operator)
  const action = builtActions(TEST_WEB_DIST).find(({ key }) => key.endsWith('#signOutEverywhere'))
  await fetch(`${web.url}/sensors`, {
    method: 'POST',
    redirect: 'manual',
    headers: { Cookie: second, 'Next-Action': action?.id ?? '' },
    body: '[]',
  })
  await Promise.all(streams.map(({ ended }) => ended))
  expect(others.isOpen()).toBe(true)
})

test('the web server ends on SIGTERM although streams are open', async () => {
  const streams = await Promise.all(
    [mill.people.operator, mill.people.engineer, mill.people.tenant].map(async (email) =>
      openStream(await enter(email)),
    ),
  )
  expect(streams.every(({ isOpen }) => isOpen())).toBe(true)
  const how = await web.stop()
  await Promise.all(streams.map(({ ended }) => ended))
  expect(how.signal).toBeNull()
})

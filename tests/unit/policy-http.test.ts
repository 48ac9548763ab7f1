import { NextRequest } from 'next/server'
import { beforeAll, describe, expect, test, vi } from 'vitest'
import { z } from 'zod'
import { Refusal } from '@/lib/errors'
import { action } from '@/lib/server/http/action'
import { route } from '@/lib/server/http/route'

beforeAll(() => {
  vi.stubEnv('DATABASE_URL', 'postgres://nobody@127.0.0.1:1/nothing')
  vi.stubEnv('LOG_LEVEL', 'silent')
})

const none = { params: Promise.resolve({}) }
const ask = (path: string, init?: ConstructorParameters<typeof NextRequest>[1]) =>
  new NextRequest(`http://site.example${path}`, init)
const problemOf = async (response: Response) => {
  expect(response.headers.get('content-type')).toBe('application/problem+json')
  return (await response.json()) as Record<string, unknown>
}

/** Without a permission neither can be written: these lines are type errors, which the type check demands. */
export const neverRun = () => {
  // @ts-expect-error a handler needs a permission
  route({ handler: async () => null })
  // @ts-expect-error and it is one of the table
  route({ permission: 'rounds.paint', handler: async () => null })
  // @ts-expect-error an action needs a permission
  action({ schema: z.object({}), run: async () => null })
  // @ts-expect-error an open handler has no person
  route({ permission: 'open', handler: async ({ ctx }) => ctx.scope })
  return route({ permission: 'rounds.read', handler: async ({ ctx }) => ctx.scope.organizationId })
}

describe('a route handler', () => {
  const list = route({
    permission: 'open',
    query: z.object({ limit: z.coerce.number().int().max(10).default(3) }),
    handler: async ({ query }) => ({ rooms: Array.from({ length: query.limit }, (_, i) => i) }),
  })

  test('sends plain data as JSON with an ETag, and 304 to who has it', async () => {
    const first = await list(ask('/x?limit=2'), none)
    expect([first.status, await first.json()]).toEqual([200, { rooms: [0, 1] }])
    const etag = first.headers.get('etag') ?? ''
    const again = (given: string) => list(ask('/x?limit=2', { headers: { 'If-None-Match': given } }), none)
    expect((await again(etag)).status).toBe(304)
    expect((await again(`"other", W/${etag}`)).status).toBe(304)
    expect(await (await again(etag)).text()).toBe('')
    expect((await again('"other"')).status).toBe(200)
    const other = await list(ask('/x?limit=3', { headers: { 'If-None-Match': etag } }), none)
    expect(other.status).toBe(200)
    expect(first.headers.get('cache-control')).toBe('private, no-cache')
  })

  test('names every unusable value (RFC 9457, section 3)', async () => {
    const response = await list(ask('/x?limit=many'), none)
    expect(response.status).toBe(422)
    expect(await problemOf(response)).toMatchObject({
      status: 422,
      instance: '/x',
      errors: { limit: [expect.stringContaining('number')] },
    })
  })

  test('says that a body is no JSON', async () => {
    const take = route({
      permission: 'open',
      body: z.object({ a: z.number() }),
      handler: async ({ body }) => body,
    })
    const send = (body: string) => take(ask('/x', { method: 'POST', body }), none)
    expect((await send('{')).status).toBe(400)
    expect((await send('{"a":"b"}')).status).toBe(422)
    expect(await (await send('{"a":1}')).json()).toEqual({ a: 1 })
  })

  test('passes on a refusal with its wait, and keeps what nobody foresaw to itself', async () => {
    const fail = (error: Error) =>
      route({
        permission: 'open',
        handler: async () => {
          throw error
        },
      })(ask('/x'), none)
    const limited = await fail(new Refusal('too-many', 'Wait a little.', { retryAfterSeconds: 30 }))
    expect([limited.status, limited.headers.get('retry-after')]).toEqual([429, '30'])
    expect(await problemOf(limited)).toMatchObject({ detail: 'Wait a little.' })
    const unforeseen = await fail(new Error('password=hunter2'))
    expect(unforeseen.status).toBe(500)
    expect(JSON.stringify(await problemOf(unforeseen))).not.toContain('hunter2')
    const gone = await fail(Object.assign(new Error('connect'), { code: 'ECONNREFUSED' }))
    expect([gone.status, gone.headers.get('retry-after')]).toEqual([503, '60'])
  })

  test('refuses a write that another site’s page sends, before it looks at who asks', async () => {
    const write = route({ permission: 'self.manage', handler: async () => 'written' })
    const from = (headers: Record<string, string>) =>
      write(ask('/x', { method: 'POST', headers: { host: 'site.example', ...headers } }), none)
    const foreign: Record<string, string>[] = [
      { origin: 'https://elsewhere.example' },
      { origin: 'null' },
      { 'sec-fetch-site': 'cross-site' },
      { 'sec-fetch-site': 'same-site' },
    ]
    for (const headers of foreign) {
      expect((await from(headers)).status, JSON.stringify(headers)).toBe(403)
    }
    expect((await from({ origin: 'http://site.example', 'sec-fetch-site': 'same-origin' })).status).toBe(401)
  })
})

describe('an action', () => {
  const add = action({
    permission: 'open',
    schema: z.object({
      room: z.string().min(1, 'Name the room.'),
      day: z.union([z.string(), z.array(z.string())]),
    }),
    run: async (_, input) => input,
  })

  test('takes an object, or a form’s data with the earlier result before it', async () => {
    expect(await add({ room: 'a', day: '1' })).toEqual({ ok: true, value: { room: 'a', day: '1' } })
    const form = new FormData()
    form.append('$ACTION_ID_7', '')
    form.append('room', 'a')
    form.append('day', '1')
    form.append('day', '2')
    expect(await add(null, form)).toEqual({ ok: true, value: { room: 'a', day: ['1', '2'] } })
    expect(await add(form)).toEqual({ ok: true, value: { room: 'a', day: ['1', '2'] } })
  })

  test('answers words by field, and never throws what went wrong inside', async () => {
    expect(await add({ room: '', day: '1' })).toMatchObject({
      ok: false,
      kind: 'invalid',
      fields: { room: ['Name the room.'] },
    })
    const broken = action({
      permission: 'open',
      schema: z.unknown(),
      run: async () => {
        throw new Error('secret inside')
      },
    })
    const answer = await broken({})
    expect(answer).toMatchObject({ ok: false, kind: 'failed' })
    expect(JSON.stringify(answer)).not.toContain('secret inside')
  })
})

import { unstable_rethrow } from 'next/navigation'
import type { NextRequest } from 'next/server'
import type { z } from 'zod'
import { Refusal } from '@/lib/errors'
import { can, type Permission, type PermissionOrOpen, whoMay } from '@/lib/policy/permissions'
import { sessionCookie } from '../auth/cookie'
import { signedInBy } from '../auth/session'
import { jsonResponse } from './json'
import { asRefusal, problemResponse } from './problem'
import { contextOf, type SignedContext } from './signed'

type Schema = z.ZodType | undefined
type Parsed<S extends Schema> = S extends z.ZodType ? z.output<S> : undefined

/** What a handler is given: parsed parts of the request and, unless the route is open, the person's context. */
export type RouteInput<
  Permitted extends PermissionOrOpen,
  P extends Schema,
  Q extends Schema,
  B extends Schema,
> = {
  request: NextRequest
  params: Parsed<P>
  query: Parsed<Q>
  body: Parsed<B>
  ctx: Permitted extends Permission ? SignedContext : null
}

export type RouteSpec<
  Permitted extends PermissionOrOpen,
  P extends Schema,
  Q extends Schema,
  B extends Schema,
> = {
  /** Required: what the caller must hold; 'open' where nobody needs to be signed in. */
  permission: Permitted
  params?: P
  query?: Q
  body?: B
  /** A Response, or plain data that is sent as JSON with an ETag. */
  handler: (input: RouteInput<Permitted, P, Q, B>) => Promise<unknown>
}

type RouteHandler = (request: NextRequest, route: { params: Promise<unknown> }) => Promise<Response>

/**
 * A route handler that cannot be written without naming its permission. Answers 401 and 403 before it looks at the input, 422 with
 * every fault named, and each refusal as problem details (RFC 9457); plain data goes out as JSON with an ETag.
 */
export function route<
  const Permitted extends PermissionOrOpen,
  P extends Schema = undefined,
  Q extends Schema = undefined,
  B extends Schema = undefined,
>(spec: RouteSpec<Permitted, P, Q, B>): RouteHandler {
  return async (request, { params }) => {
    try {
      const ctx = await admit(request, spec.permission)
      const input = {
        request,
        params: spec.params?.parse(await params),
        query: spec.query?.parse(Object.fromEntries(request.nextUrl.searchParams)),
        body: spec.body ? spec.body.parse(await jsonBody(request)) : undefined,
        ctx,
      } as RouteInput<Permitted, P, Q, B>
      const answer = await spec.handler(input)
      return answer instanceof Response ? answer : jsonResponse(request, answer)
    } catch (error) {
      unstable_rethrow(error)
      const { pathname } = request.nextUrl
      return problemResponse(asRefusal(error, `${request.method} ${pathname}`), pathname)
    }
  }
}

/** The caller's context, or the refusal: a foreign page's write, nobody signed in, or not the permission. */
async function admit(request: NextRequest, permission: PermissionOrOpen): Promise<SignedContext | null> {
  if (permission === 'open') return null
  refuseForeignWrite(request)
  const signed = await signedInBy(request.cookies.get(sessionCookie().name)?.value)
  if (!signed)
    throw new Refusal('not-signed-in', 'This needs a signed-in person; the session may have ended.')
  if (!can(signed.membership.roles, permission)) {
    throw new Refusal('not-allowed', `This needs ${whoMay(permission)}. Ask your administrator.`)
  }
  return contextOf(signed)
}

/** A browser says where a write comes from; one from another site is refused although the cookie came along. */
function refuseForeignWrite(request: NextRequest): void {
  if (['GET', 'HEAD', 'OPTIONS'].includes(request.method)) return
  const site = request.headers.get('sec-fetch-site')
  const origin = request.headers.get('origin')
  const host = request.headers.get('x-forwarded-host') ?? request.headers.get('host')
  const foreignSite = site !== null && site !== 'same-origin' && site !== 'none'
  const foreignOrigin = origin !== null && (!URL.canParse(origin) || new URL(origin).host !== host)
  if (foreignSite || foreignOrigin) {
    throw new Refusal('not-allowed', 'This came from another site. Do it from Ebbmark itself.')
  }
}

async function jsonBody(request: NextRequest): Promise<unknown> {
  try {
    return await request.json()
  } catch (cause) {
    throw new Refusal(
      'bad-request',
      'The body is not JSON. Send one JSON value with Content-Type application/json.',
      {
        cause,
      },
    )
  }
}

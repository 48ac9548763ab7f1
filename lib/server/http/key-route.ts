import { unstable_rethrow } from 'next/navigation'
import type { NextRequest } from 'next/server'
import type { z } from 'zod'
import { apiKeySha256, isApiKey } from '@/db/api-key'
import { noteKeyUse } from '@/db/changes/api-keys'
import { findStandingKey, type StandingKey } from '@/db/queries/api-keys'
import { Refusal } from '@/lib/errors'
import type { KeyScope } from '@/lib/policy/key-scopes'
import { systemClock } from '../clock'
import { database } from '../database'
import { KEY_RATE, secondsUntilNext } from '../gateway/rate'
import { jsonResponse } from './json'
import { asRefusal, problemResponse } from './problem'

/** Bytes of a body that are read. */
const BODY_MAX_BYTES = 1024 * 1024

export type KeyRouteInput<B> = { request: NextRequest; key: StandingKey; body: B; text: string; now: Date }

export type KeyRouteSpec<S extends z.ZodType> = {
  /** Required: what the caller's API key must hold. */
  keyScope: KeyScope
  body: S
  /** A Response, or plain data that is sent as JSON. */
  handler: (input: KeyRouteInput<z.output<S>>) => Promise<unknown>
}

/**
 * A route handler for programs: it cannot be written without naming the scope that the API key (`Authorization: Bearer …`) must hold. A
 * session cookie counts for nothing here, so no page of another site can use it. Refusals are problem details, as in `route`.
 */
export function keyRoute<S extends z.ZodType>(
  spec: KeyRouteSpec<S>,
): (request: NextRequest) => Promise<Response> {
  return async (request) => {
    try {
      const now = systemClock.now()
      const key = await admit(request, spec.keyScope, now)
      const text = await textOf(request)
      const body = spec.body.parse(parsed(text))
      const answer = await spec.handler({ request, key, body, text, now })
      return answer instanceof Response ? answer : jsonResponse(request, answer)
    } catch (error) {
      unstable_rethrow(error)
      const { pathname } = request.nextUrl
      const response = problemResponse(asRefusal(error, `${request.method} ${pathname}`), pathname)
      if (response.status === 401) response.headers.set('WWW-Authenticate', 'Bearer')
      return response
    }
  }
}

async function admit(request: NextRequest, keyScope: KeyScope, now: Date): Promise<StandingKey> {
  const given = /^Bearer +(\S+) *$/i.exec(request.headers.get('authorization') ?? '')?.[1]
  const found = given !== undefined && isApiKey(given) ? await standingKey(given) : null
  if (!found)
    throw new Refusal(
      'not-signed-in',
      'This needs an API key that stands: Authorization: Bearer ebb_…. An administrator makes one with npm run api-key.',
    )
  if (!found.scopes.includes(keyScope))
    throw new Refusal('not-allowed', `This API key does not hold the scope ${keyScope}.`)
  const waitS = secondsUntilNext(found.id, now.getTime())
  if (waitS > 0)
    throw new Refusal(
      'too-many',
      `More than ${KEY_RATE.requestsPerS} requests a second with this key. Nothing was stored; send up to 500 readings in one request, ${waitS} s later.`,
      { retryAfterSeconds: waitS },
    )
  await database().asSystem('note the use of a key', (tx) => noteKeyUse(tx, { id: found.id, now }))
  return found
}

function standingKey(key: string): Promise<StandingKey | null> {
  return database().asSystem('find an API key', (tx) => findStandingKey(tx, { sha256: apiKeySha256(key) }))
}

/** The body as text; one that is announced or turns out too large is not read to its end. */
async function textOf(request: NextRequest): Promise<string> {
  const tooLarge = () =>
    new Refusal(
      'too-large',
      `The body has more than ${BODY_MAX_BYTES} bytes. Send up to 500 readings in one request.`,
    )
  if (Number(request.headers.get('content-length') ?? 0) > BODY_MAX_BYTES) throw tooLarge()
  const chunks: Uint8Array[] = []
  let bytes = 0
  for await (const chunk of request.body ?? []) {
    bytes += chunk.byteLength
    if (bytes > BODY_MAX_BYTES) throw tooLarge()
    chunks.push(chunk)
  }
  return Buffer.concat(chunks).toString('utf8')
}

function parsed(text: string): unknown {
  try {
    return JSON.parse(text)
  } catch (cause) {
    throw new Refusal(
      'bad-request',
      'The body is not JSON. Send a list of readings with Content-Type application/json.',
      {
        cause,
      },
    )
  }
}

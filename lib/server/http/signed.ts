import { cookies } from 'next/headers'
import { cache } from 'react'
import type { Tx } from '@/db/client'
import { sessionCookie } from '../auth/cookie'
import { type Signed, signedInBy } from '../auth/session'
import { database } from '../database'

/** What every page, handler and action of a signed-in person works with. */
export type SignedContext = Signed & {
  /** Runs queries in one transaction that sees only what this person may see. */
  read: <T>(fn: (tx: Tx) => Promise<T>) => Promise<T>
  /** Runs changes in one transaction of the same scope: row, audit row and notice together. */
  change: <T>(fn: (tx: Tx) => Promise<T>) => Promise<T>
}

/** The person behind this request, or null; read from the database once a request. */
export const currentlySigned = cache(async (): Promise<Signed | null> => {
  const jar = await cookies()
  return signedInBy(jar.get(sessionCookie().name)?.value)
})

/** The context of one signed-in person, with transactions bound to their scope. */
export function contextOf(signed: Signed): SignedContext {
  const inScope = <T>(fn: (tx: Tx) => Promise<T>) => database().withScope(signed.scope, fn)
  return { ...signed, read: inScope, change: inScope }
}

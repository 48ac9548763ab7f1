import { sql } from 'drizzle-orm'
import { drizzle, type NodePgDatabase } from 'drizzle-orm/node-postgres'
import pg from 'pg'
import type { Scope } from '@/lib/policy/scope'
import * as schema from './schema'

/** A transaction with its scope set: the only handle that reads or writes. */
export type Tx = Parameters<Parameters<NodePgDatabase<typeof schema>['transaction']>[0]>[0]

export type Database = {
  /** Runs `fn` in one transaction that sees only what the scope allows. */
  withScope: <T>(scope: Scope, fn: (tx: Tx) => Promise<T>) => Promise<T>
  /** Runs `fn` in one transaction of a job, ingest or sign-in that sees every organisation; the reason is kept with the transaction. */
  asSystem: <T>(reason: string, fn: (tx: Tx) => Promise<T>) => Promise<T>
  /** As asSystem, with the plain pg client inside the transaction: for COPY and for ingest's one-statement batches. */
  asSystemRaw: <T>(reason: string, fn: (client: pg.PoolClient) => Promise<T>) => Promise<T>
  /** Answers true when the database answers within `timeoutMs`. */
  answers: (timeoutMs: number) => Promise<boolean>
  close: () => Promise<void>
}

const appRole = 'ebbmark_app'

/**
 * Opens the database for one process. `url` should sign in as the application role; where it signs in as another (a single-user
 * managed database), each transaction first takes the application role, so row-level security holds all the same.
 */
export function openDatabase(options: {
  url: string
  poolSize?: number
  applicationName?: string
  /** a query that has no answer by then fails and its connection is dropped: for processes that must not hang with a database that hangs */
  queryTimeoutMs?: number
  onError?: (error: Error) => void
}): Database {
  const pool = new pg.Pool({
    connectionString: options.url,
    max: options.poolSize ?? 10,
    application_name: options.applicationName ?? 'ebbmark',
    connectionTimeoutMillis: 5000,
    idleTimeoutMillis: 30_000,
    keepAlive: true,
    query_timeout: options.queryTimeoutMs,
  })
  pool.on('error', (error) => options.onError?.(error))
  // a connection lost between two statements of a transaction must fail its next statement, not end the process
  pool.on('connect', (client) => client.on('error', () => undefined))
  const takesRole = new URL(options.url).username !== appRole
  const handle = drizzle(pool, { schema })

  const withScope: Database['withScope'] = (scope, fn) =>
    handle.transaction(async (tx) => {
      if (takesRole) await tx.execute(sql.raw(`SET LOCAL ROLE ${appRole}`))
      await tx.execute(sql`SELECT set_config('ebb.organization', ${String(scope.organizationId)}, true),
        set_config('ebb.buildings', ${scope.buildingIds === null ? '' : `{${scope.buildingIds.join(',')}}`}, true),
        set_config('ebb.tenancy', ${scope.tenancyId === null ? '' : String(scope.tenancyId)}, true),
        set_config('ebb.single_person', ${scope.hidesSinglePerson ? 'hide' : ''}, true),
        set_config('ebb.system', '', true)`)
      return fn(tx)
    })

  const asSystem: Database['asSystem'] = (reason, fn) =>
    handle.transaction(async (tx) => {
      if (takesRole) await tx.execute(sql.raw(`SET LOCAL ROLE ${appRole}`))
      await tx.execute(sql`SELECT set_config('ebb.system', ${reason}, true)`)
      return fn(tx)
    })

  const asSystemRaw: Database['asSystemRaw'] = async (reason, fn) => {
    const client = await pool.connect()
    let broken: Error | undefined
    try {
      await client.query('BEGIN')
      if (takesRole) await client.query(`SET LOCAL ROLE ${appRole}`)
      await client.query(`SELECT set_config('ebb.system', $1, true)`, [reason])
      const result = await fn(client)
      await client.query('COMMIT')
      return result
    } catch (error) {
      broken = error as Error
      await client.query('ROLLBACK').then(
        () => (broken = undefined),
        () => undefined,
      )
      throw error
    } finally {
      client.release(broken)
    }
  }

  return {
    withScope,
    asSystem,
    asSystemRaw,
    answers: (timeoutMs) =>
      Promise.race([
        pool.query('SELECT 1').then(
          () => true,
          () => false,
        ),
        new Promise<boolean>((resolve) => setTimeout(() => resolve(false), timeoutMs).unref()),
      ]),
    close: () => pool.end(),
  }
}

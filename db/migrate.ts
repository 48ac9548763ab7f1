import path from 'node:path'
import { drizzle } from 'drizzle-orm/node-postgres'
import { migrate } from 'drizzle-orm/node-postgres/migrator'
import { Logger, runMigrations } from 'graphile-worker'
import pg from 'pg'

/** Any 64-bit key will do, so long as every migrator takes the same. */
const migrationLock = 7241015

/** The queue's own migrations are not worth a line each. */
const silent = new Logger(() => () => undefined)

/**
 * Brings the database at `ownerUrl` to the newest schema. Safe to run twice or at once: an advisory lock lets one migrator work while
 * the others wait and then find nothing to do. Also makes the job queue's own schema and the months around `now` for readings.
 */
export async function migrateDatabase(
  ownerUrl: string,
  now: Date,
  folder = path.join(process.cwd(), 'db', 'migrations'),
): Promise<void> {
  const client = new pg.Client({ connectionString: ownerUrl, application_name: 'ebbmark migrate' })
  await client.connect()
  try {
    await client.query('SELECT pg_advisory_lock($1)', [migrationLock])
    await migrate(drizzle(client), { migrationsFolder: folder })
    await runMigrations({ connectionString: ownerUrl, maxPoolSize: 2, logger: silent })
    for (const months of [0, 1, 2]) {
      await client.query(`SELECT ensure_readings_month($1::timestamptz + make_interval(months => $2))`, [
        now,
        months,
      ])
    }
    await client.query('SELECT pg_advisory_unlock($1)', [migrationLock])
  } finally {
    await client.end()
  }
}

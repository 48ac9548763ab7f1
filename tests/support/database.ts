import { createHash, randomBytes } from 'node:crypto'
import fs from 'node:fs'
import path from 'node:path'
import pg from 'pg'
import { type Database, openDatabase } from '@/db/client'
import { migrateDatabase } from '@/db/migrate'
import { bootstrapDatabase } from '@/db/server/bootstrap.mjs'

const migrations = path.join(process.cwd(), 'db', 'migrations')

export type TestDatabase = {
  name: string
  appUrl: string
  ownerUrl: string
  database: Database
  drop: () => Promise<void>
}

/** A database of its own for one test file, cloned from a migrated template (made once per state of the migrations). */
export async function createTestDatabase(): Promise<TestDatabase> {
  const base = process.env.TEST_OWNER_URL
  if (!base)
    throw new Error(
      'TEST_OWNER_URL is not set: run tests with npm test, or npx vitest run (its set-up starts PostgreSQL).',
    )
  const superuserUrl = `${base}/postgres`
  const template = `ebb_template_${migrationsHash()}`
  const name = `ebb_test_${randomBytes(5).toString('hex')}`
  const at = new URL(base)
  const url = (user: string, database: string) => `postgres://${user}@${at.hostname}:${at.port}/${database}`
  const client = new pg.Client({ connectionString: superuserUrl })
  await client.connect()
  try {
    await client.query('SELECT pg_advisory_lock(881)')
    if (
      (await client.query('SELECT 1 FROM pg_database WHERE datname = $1 AND datistemplate', [template]))
        .rowCount === 0
    ) {
      await client.query(`DROP DATABASE IF EXISTS ${template}`)
      await bootstrapDatabase({
        superuserUrl,
        databaseName: template,
        ownerPassword: null,
        appPassword: null,
      })
      await migrateDatabase(url('ebbmark_owner', template), new Date(), migrations)
      await client.query(`ALTER DATABASE ${template} IS_TEMPLATE true`)
    }
    await client.query(`CREATE DATABASE ${name} TEMPLATE ${template} OWNER ebbmark_owner`)
    await client.query('SELECT pg_advisory_unlock(881)')
  } finally {
    await client.end()
  }
  const appUrl = url('ebbmark_app', name)
  const database = openDatabase({ url: appUrl, poolSize: 5, applicationName: 'ebbmark test' })
  return {
    name,
    appUrl,
    ownerUrl: url('ebbmark_owner', name),
    database,
    drop: () => drop(database, superuserUrl, name),
  }
}

async function drop(database: Database, superuserUrl: string, name: string): Promise<void> {
  await database.close()
  const client = new pg.Client({ connectionString: superuserUrl })
  await client.connect()
  await client.query(`DROP DATABASE IF EXISTS ${name} WITH (FORCE)`)
  await client.end()
}

function migrationsHash(): string {
  const hash = createHash('sha256')
  for (const file of fs
    .readdirSync(migrations)
    .filter((name) => name.endsWith('.sql'))
    .sort()) {
    hash.update(fs.readFileSync(path.join(migrations, file)))
  }
  return hash.digest('hex').slice(0, 12)
}

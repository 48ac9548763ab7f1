import fs from 'node:fs'
import path from 'node:path'
import pg from 'pg'
import { putDataFiles } from './data-files'
import { DATA, DUMP, MANIFEST, type Manifest, sha256 } from './make'
import { Mistake, runPostgres, tar } from './programs'

/**
 * `into`: the database itself, which must be empty; a new one of this name beside it; or `replace`: a new one that takes its name, while
 * the old one stays under another.
 */
export type RestoreOptions = {
  ownerUrl: string
  dataDir: string
  from: string
  into: 'itself' | 'replace' | { newDatabase: string }
  now: Date
}

export type Restored = {
  manifest: Manifest
  /** the database that holds the backup now */
  database: string
  /** name of the database that was replaced */
  keptDatabase: string | null
  /** data files that were there with another content, kept with a suffix */
  keptFiles: string[]
}

const stampOf = (now: Date) => now.toISOString().slice(0, 19).replace(/\D/g, '')

/**
 * Puts a backup into an empty database, in one transaction: all of it or nothing. Never writes into a database that holds anything, never
 * drops one.
 * @throws Mistake where the file, the names or the state of the database do not allow it
 */
export async function restoreBackup({
  ownerUrl,
  dataDir,
  from,
  into,
  now,
}: RestoreOptions): Promise<Restored> {
  if (!fs.existsSync(from)) throw new Mistake(`--from ${from}: there is no such file`)
  fs.mkdirSync(dataDir, { recursive: true })
  const stage = fs.mkdtempSync(path.join(dataDir, '.ebbmark-restore-'))
  try {
    const manifest = await unpack(from, stage)
    const name = databaseOf(ownerUrl)
    const target =
      into === 'itself' ? name : into === 'replace' ? `${name}_restoring_${stampOf(now)}` : into.newDatabase
    if (into === 'itself') await requireEmpty(ownerUrl)
    if (into === 'replace') await requireUnused(ownerUrl)
    if (into !== 'itself') await makeDatabase(ownerUrl, target)
    const url = withDatabase(ownerUrl, target)
    await fill(url, dataDir, path.join(stage, DUMP))
    const keptDatabase = into === 'replace' ? await takeName(ownerUrl, target, now) : null
    const keptFiles = putDataFiles(path.join(stage, DATA), dataDir, `.before-${stampOf(now)}`)
    return { manifest, database: into === 'replace' ? name : target, keptDatabase, keptFiles }
  } finally {
    fs.rmSync(stage, { recursive: true, force: true })
  }
}

async function unpack(from: string, stage: string): Promise<Manifest> {
  try {
    await tar(['-xf', from, '-C', stage, '--no-same-owner'])
  } catch (error) {
    throw new Mistake(`--from ${from}: is not a whole backup (${(error as Error).message})`)
  }
  const file = path.join(stage, MANIFEST)
  if (!fs.existsSync(file))
    throw new Mistake(`--from ${from}: is not a backup of Ebbmark (no ${MANIFEST} in it)`)
  const manifest = JSON.parse(fs.readFileSync(file, 'utf8')) as Manifest
  if (manifest.version !== 1)
    throw new Mistake(
      `--from ${from}: was made by a newer version (${manifest.version}); restore it with that one`,
    )
  const dump = path.join(stage, DUMP)
  if (!fs.existsSync(dump) || (await sha256(dump)) !== manifest.dumpSha256)
    throw new Mistake(`--from ${from}: is damaged, its database does not match its checksum`)
  return manifest
}

const databaseOf = (url: string) => decodeURIComponent(new URL(url).pathname.slice(1))

function withDatabase(url: string, name: string): string {
  const other = new URL(url)
  other.pathname = `/${encodeURIComponent(name)}`
  return other.toString()
}

async function connected<T>(url: string, fn: (client: pg.Client) => Promise<T>): Promise<T> {
  const client = new pg.Client({ connectionString: url, application_name: 'ebbmark restore' })
  await client.connect()
  try {
    return await fn(client)
  } finally {
    await client.end()
  }
}

async function requireEmpty(url: string): Promise<void> {
  const { rows } = await connected(url, (client) =>
    client.query(`SELECT count(*)::int AS n FROM pg_class c JOIN pg_namespace n ON n.oid = c.relnamespace
      WHERE c.relkind IN ('r', 'p', 'v', 'm', 'S') AND n.nspname !~ '^pg_' AND n.nspname <> 'information_schema'`),
  )
  if (rows[0].n > 0)
    throw new Mistake(
      `The database ${databaseOf(url)} is not empty and stays as it is. Give --replace to put the backup in its place (the old one is kept under another name), or --force-into NAME to make a new database beside it.`,
    )
}

async function requireUnused(url: string): Promise<void> {
  const { rows } = await connected(url, (client) =>
    client.query(
      'SELECT count(*)::int AS n FROM pg_stat_activity WHERE datname = current_database() AND pid <> pg_backend_pid()',
    ),
  )
  if (rows[0].n > 0)
    throw new Mistake(
      `The database ${databaseOf(url)} is in use (${rows[0].n} connections): stop Ebbmark, then restore.`,
    )
}

async function makeDatabase(ownerUrl: string, name: string): Promise<void> {
  if (!/^[a-z_][a-z0-9_]{0,50}$/.test(name))
    throw new Mistake(`--force-into ${name}: give a name of small letters, digits and _`)
  await connected(ownerUrl, async (client) => {
    const known = await client.query('SELECT FROM pg_database WHERE datname = $1', [name])
    if (known.rowCount !== 0)
      throw new Mistake(`--force-into ${name}: there is a database of this name already`)
    await client.query(`CREATE DATABASE ${client.escapeIdentifier(name)}`)
  })
}

async function fill(url: string, dataDir: string, dump: string): Promise<void> {
  // roles belong to the server, not to a database, so no dump holds them
  await connected(url, async (client) => {
    const known = await client.query(`SELECT FROM pg_roles WHERE rolname = 'ebbmark_app'`)
    if (known.rowCount === 0) await client.query('CREATE ROLE ebbmark_app NOLOGIN')
  })
  const args = ['--no-owner', '--exit-on-error', '--single-transaction', dump]
  await runPostgres('pg_restore', { url, dataDir, args })
  await connected(url, (client) => client.query('ANALYZE'))
}

async function takeName(ownerUrl: string, restored: string, now: Date): Promise<string> {
  const name = databaseOf(ownerUrl)
  const kept = `${name}_before_${stampOf(now)}`
  await connected(withDatabase(ownerUrl, 'postgres'), async (client) => {
    const [old, aside, fresh] = [name, kept, restored].map((each) => client.escapeIdentifier(each))
    try {
      await client.query(`ALTER DATABASE ${old} RENAME TO ${aside}`)
    } catch (error) {
      if ((error as { code?: string }).code !== '55006') throw error
      throw new Mistake(
        `The backup is in the new database ${restored}, but ${name} is in use: stop Ebbmark, then restore again.`,
      )
    }
    await client.query(`ALTER DATABASE ${fresh} RENAME TO ${old}`)
  })
  return kept
}

import { createHash } from 'node:crypto'
import fs from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { sql } from 'drizzle-orm'
import pg from 'pg'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { queueJob } from '@/db/changes/jobs'
import { openDatabase } from '@/db/client'
import { migrateDatabase } from '@/db/migrate'
import { makeBackup } from '@/ingest/backup/make'
import { restoreBackup } from '@/ingest/backup/take-back'
import { rollUp } from '@/ingest/nightly/roll-up'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { makeSmallOrganization } from '@/tests/support/small-building'
import { addSmallResults } from '@/tests/support/small-results'

/** A backup is proven by what comes out of it: every table's rows, its rules and rights, in a database that was empty. */
const now = new Date('2026-05-14T10:00:00Z')
const folder = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-backup-'))
const dataDir = path.join(folder, 'data')
const out = path.join(folder, 'backup.tar')
const made: string[] = []
let test: TestDatabase

const files: Record<string, string> = {
  'secret.key': 'a key of 32 bytes',
  'demo.json': '{"seed":1}',
  'archive/readings-2020-01.csv.gz': 'not really compressed',
}
const leftOut = [
  'postgres/base',
  'log/web.log',
  'mailbox/1.eml',
  'secrets.json',
  'environment.json',
  'old-backup.tar',
]

beforeAll(async () => {
  for (const [file, text] of [...Object.entries(files), ...leftOut.map((file) => [file, 'mine'] as const)]) {
    fs.mkdirSync(path.dirname(path.join(dataDir, file)), { recursive: true })
    fs.writeFileSync(path.join(dataDir, file), text, { mode: 0o600 })
  }
  test = await createTestDatabase()
  const mill = await makeSmallOrganization(test.database, 'mill')
  await addSmallResults(test.database, mill)
  await test.database.asSystem('test', async (tx) => {
    await tx.execute(sql`INSERT INTO readings (at, received_at, sensor_id, co2_ppm, temp_c) SELECT m, m, s.id, 400 + s.id, 21.37
      FROM generate_series('2026-05-13T00:00:00Z'::timestamptz, '2026-05-14T09:59:00Z', interval '1 minute') m, sensors s`)
    await queueJob(tx, { task: 'watch-sensors', payload: { buildingId: mill.buildingId } })
  })
  await rollUp({ database: test.database, clock: { now: () => now }, readingsKeptDays: null })
  await makeBackup({ ownerUrl: test.ownerUrl, dataDir, out, now })
})
afterAll(async () => {
  await test.drop()
  const client = new pg.Client({ connectionString: `${process.env.TEST_OWNER_URL}/postgres` })
  await client.connect()
  for (const name of made) await client.query(`DROP DATABASE IF EXISTS ${name} WITH (FORCE)`)
  await client.end()
  fs.rmSync(folder, { recursive: true, force: true })
})

const urlOf = (name: string) => {
  const url = new URL(test.ownerUrl)
  url.pathname = `/${name}`
  return url.toString()
}

async function asOwner<T>(url: string, fn: (client: pg.Client) => Promise<T>): Promise<T> {
  const client = new pg.Client({ connectionString: url })
  await client.connect()
  try {
    return await fn(client)
  } finally {
    await client.end()
  }
}

const schemas = `n.nspname !~ '^pg_' AND n.nspname <> 'information_schema'`

/** Rows and content hash of every table, next values of sequences, and the definition of everything that guards them. */
async function contentOf(url: string): Promise<Record<string, string>> {
  return asOwner(url, async (client) => {
    const content: Record<string, string> = {}
    const tables = await client.query<{ name: string }>(
      `SELECT format('%I.%I', n.nspname, c.relname) AS name FROM pg_class c JOIN pg_namespace n ON n.oid = c.relnamespace WHERE c.relkind = 'r' AND ${schemas} ORDER BY 1`,
    )
    for (const { name } of tables.rows) {
      const { rows } = await client.query<{ row: string }>(
        `SELECT to_jsonb(t)::text AS row FROM ${name} t ORDER BY 1`,
      )
      const hash = createHash('sha256')
      for (const { row } of rows) hash.update(`${row}\n`)
      content[`table ${name}`] = `${rows.length} ${hash.digest('hex')}`
    }
    const texts = {
      sequences: `SELECT schemaname || sequencename || coalesce(last_value, -1) AS t FROM pg_sequences`,
      policies: `SELECT concat_ws(' ', schemaname, tablename, policyname, permissive, roles, cmd, qual, with_check) AS t FROM pg_policies`,
      rights: `SELECT concat_ws(' ', n.nspname, c.relname, c.relrowsecurity, (SELECT array_agg(a::text ORDER BY a::text) FROM unnest(c.relacl) a)) AS t
        FROM pg_class c JOIN pg_namespace n ON n.oid = c.relnamespace WHERE ${schemas}`,
      functions: `SELECT concat_ws(' ', p.oid::regprocedure, p.prosecdef, p.proconfig, md5(p.prosrc), (SELECT array_agg(a::text ORDER BY a::text) FROM unnest(p.proacl) a)) AS t
        FROM pg_proc p JOIN pg_namespace n ON n.oid = p.pronamespace WHERE ${schemas}`,
      constraints: `SELECT concat_ws(' ', conrelid::regclass, conname, pg_get_constraintdef(c.oid)) AS t FROM pg_constraint c JOIN pg_namespace n ON n.oid = c.connamespace WHERE ${schemas}`,
      indexes: `SELECT indexdef AS t FROM pg_indexes WHERE schemaname !~ '^pg_'`,
      views: `SELECT schemaname || viewname || md5(definition) AS t FROM pg_views WHERE schemaname !~ '^pg_' AND schemaname <> 'information_schema'`,
      partitions: `SELECT concat_ws(' ', inhparent::regclass, inhrelid::regclass, pg_get_expr(c.relpartbound, c.oid)) AS t FROM pg_inherits i JOIN pg_class c ON c.oid = i.inhrelid`,
    }
    for (const [name, text] of Object.entries(texts)) {
      const { rows } = await client.query<{ t: string }>(`SELECT t FROM (${text}) x ORDER BY t`)
      expect(rows.length, name).toBeGreaterThan(0)
      content[name] = rows.map((row) => row.t).join('\n')
    }
    return content
  })
}

async function emptyDatabase(): Promise<string> {
  const name = `${test.name}_empty_${made.length}`
  made.push(name)
  await asOwner(test.ownerUrl, (client) => client.query(`CREATE DATABASE ${name}`))
  return urlOf(name)
}

it('is one file that its owner alone reads, and is not written over', async () => {
  expect(fs.statSync(out).mode & 0o777).toBe(0o600)
  expect(fs.readdirSync(folder).sort()).toEqual(['backup.tar', 'data'])
  await expect(makeBackup({ ownerUrl: test.ownerUrl, dataDir, out, now })).rejects.toThrow(
    /there is a file of this name/,
  )
  const nowhere = path.join(folder, 'no', 'backup.tar')
  await expect(makeBackup({ ownerUrl: test.ownerUrl, dataDir, out: nowhere, now })).rejects.toThrow(
    /no folder/,
  )
})

it('comes back into an empty database: every row, sequence, policy, right, function and partition', async () => {
  const ownerUrl = await emptyDatabase()
  const elsewhere = path.join(folder, 'other-machine')
  const restored = await restoreBackup({ ownerUrl, dataDir: elsewhere, from: out, into: 'itself', now })
  const before = await contentOf(test.ownerUrl)
  expect(Object.keys(before).filter((name) => name.startsWith('table '))).toContain(
    'table public.readings_2026_05',
  )
  expect(before['table public.readings_2026_05']).toMatch(/^8\d{3} /)
  expect(before['table public.reading_rollups_5min']).toMatch(/^1\d{3} /)
  expect(await contentOf(ownerUrl)).toEqual(before)
  expect(restored.keptFiles).toEqual([])
  for (const [file, text] of Object.entries(files))
    expect(fs.readFileSync(path.join(elsewhere, file), 'utf8'), file).toBe(text)
  for (const file of leftOut) expect(fs.existsSync(path.join(elsewhere, file)), file).toBe(false)
  expect(fs.statSync(path.join(elsewhere, 'secret.key')).mode & 0o777).toBe(0o600)
})

it('goes on working: migrations find nothing to do, row-level security still binds the application', async () => {
  const ownerUrl = urlOf(made[0]!)
  const before = await contentOf(ownerUrl)
  await migrateDatabase(ownerUrl, now)
  expect((await contentOf(ownerUrl))['table drizzle.__drizzle_migrations']).toBe(
    before['table drizzle.__drizzle_migrations'],
  )
  const appUrl = new URL(ownerUrl)
  appUrl.username = 'ebbmark_app'
  const database = openDatabase({ url: appUrl.toString(), poolSize: 1 })
  const count = (tx: { execute: (q: ReturnType<typeof sql>) => Promise<{ rows: unknown[] }> }) =>
    tx.execute(sql`SELECT FROM rooms`).then(({ rows }) => rows.length)
  expect(await database.asSystem('test', count)).toBe(4)
  expect(
    await database.withScope({ organizationId: 999, buildingIds: null, tenancyId: null } as never, count),
  ).toBe(0)
  await database.close()
})

it('refuses a database that holds anything, and leaves it as it is', async () => {
  const ownerUrl = urlOf(made[0]!)
  const before = await contentOf(ownerUrl)
  const restore = restoreBackup({ ownerUrl, dataDir, from: out, into: 'itself', now })
  await expect(restore).rejects.toThrow(/is not empty and stays as it is.*--force-into/)
  const taken = { newDatabase: made[0]! }
  await expect(restoreBackup({ ownerUrl, dataDir, from: out, into: taken, now })).rejects.toThrow(/already/)
  expect(await contentOf(ownerUrl)).toEqual(before)
})

it('makes a new database beside, and keeps data files that differ', async () => {
  const newDatabase = `${test.name}_beside`
  made.push(newDatabase)
  const mine = path.join(folder, 'mine')
  fs.mkdirSync(mine)
  fs.writeFileSync(path.join(mine, 'secret.key'), 'another key')
  fs.writeFileSync(path.join(mine, 'demo.json'), files['demo.json']!)
  const restored = await restoreBackup({
    ownerUrl: test.ownerUrl,
    dataDir: mine,
    from: out,
    into: { newDatabase },
    now,
  })
  expect(restored).toMatchObject({ database: newDatabase, keptDatabase: null, keptFiles: ['secret.key'] })
  expect(fs.readFileSync(path.join(mine, 'secret.key.before-20260514100000'), 'utf8')).toBe('another key')
  expect(fs.readFileSync(path.join(mine, 'secret.key'), 'utf8')).toBe(files['secret.key'])
  expect(await contentOf(urlOf(newDatabase))).toEqual(await contentOf(test.ownerUrl))
})

it('takes the place of a database that nobody uses, and keeps that one under another name', async () => {
  const name = `${test.name}_old`
  made.push(name, `${name}_before_20260514100000`)
  await asOwner(test.ownerUrl, (client) => client.query(`CREATE DATABASE ${name}`))
  await asOwner(urlOf(name), (client) => client.query('CREATE TABLE mine AS SELECT 42 AS n'))
  const replace = {
    ownerUrl: urlOf(name),
    dataDir: path.join(folder, 'third'),
    from: out,
    into: 'replace',
    now,
  } as const
  await asOwner(urlOf(name), async () => {
    await expect(restoreBackup(replace)).rejects.toThrow(/in use .1 connections.: stop Ebbmark/)
  })
  const restored = await restoreBackup(replace)
  expect(restored).toMatchObject({ database: name, keptDatabase: `${name}_before_20260514100000` })
  expect(await contentOf(urlOf(name))).toEqual(await contentOf(test.ownerUrl))
  const kept = await asOwner(urlOf(restored.keptDatabase!), (client) => client.query('SELECT n FROM mine'))
  expect(kept.rows).toEqual([{ n: 42 }])
})

it('says what is wrong with a file that is no backup, cut off or changed, and writes nothing', async () => {
  const ownerUrl = await emptyDatabase()
  const whole = fs.readFileSync(out)
  const write = (name: string, bytes: Buffer) => {
    const file = path.join(folder, name)
    fs.writeFileSync(file, bytes)
    return file
  }
  const changed = Buffer.from(whole)
  // the dump is the second member and by far the largest: the middle of the file lies in it
  changed[changed.length >> 1]! ^= 0xff
  const wrong: [string, RegExp][] = [
    [path.join(folder, 'none.tar'), /no such file/],
    [write('text.tar', Buffer.from('no tar at all')), /not a whole backup/],
    [write('cut.tar', whole.subarray(0, whole.length >> 1)), /not a whole backup|is damaged/],
    [write('changed.tar', changed), /is damaged/],
  ]
  for (const [from, says] of wrong)
    await expect(restoreBackup({ ownerUrl, dataDir, from, into: 'itself', now }), from).rejects.toThrow(says)
  const tables = await asOwner(ownerUrl, (client) =>
    client.query(`SELECT FROM pg_tables WHERE schemaname = 'public'`),
  )
  expect(tables.rowCount).toBe(0)
})

import pg from 'pg'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { migrateDatabase } from '@/db/migrate'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'

let test: TestDatabase
beforeAll(async () => {
  test = await createTestDatabase()
})
afterAll(() => test.drop())

it('migrates twice and three at once without a change', async () => {
  await Promise.all([1, 2, 3].map(() => migrateDatabase(test.ownerUrl, new Date())))
  const client = new pg.Client({ connectionString: test.ownerUrl })
  await client.connect()
  const applied = await client.query(
    'SELECT count(*)::int AS n, count(DISTINCT hash)::int AS hashes FROM drizzle.__drizzle_migrations',
  )
  await client.end()
  expect(applied.rows[0].n).toBe(applied.rows[0].hashes)
})

it('makes a month of readings on demand, also when twenty ask at once', async () => {
  await Promise.all(
    Array.from({ length: 20 }, () =>
      test.database.asSystemRaw('test', (client) =>
        client.query(`SELECT ensure_readings_month('2019-07-15Z')`),
      ),
    ),
  )
  const months = await test.database.asSystemRaw('test', (client) =>
    client.query(`SELECT count(*)::int AS n FROM pg_inherits WHERE inhrelid = 'readings_2019_07'::regclass`),
  )
  expect(months.rows[0].n).toBe(1)
})

it('keeps the month bounds in UTC and has no default partition', async () => {
  await test.database.asSystemRaw('test', (client) =>
    client.query(`SELECT ensure_readings_month('2020-03-01T00:00:00+05:30')`),
  ) // still February in UTC
  const insert = (at: string) =>
    test.database.asSystemRaw('test', (client) =>
      client.query('INSERT INTO readings (sensor_id, at, co2_ppm) VALUES (1, $1, 500)', [at]),
    )
  await expect(insert('2020-02-29T23:59:59Z')).resolves.toBeDefined()
  await expect(insert('2020-03-01T00:00:00Z')).rejects.toThrow(/no partition/)
})

it('lets the application add readings and audit rows but never change or delete them', async () => {
  for (const statement of [
    'UPDATE readings SET co2_ppm = 1',
    'DELETE FROM readings',
    'UPDATE audit_events SET action = $$x$$',
    'DELETE FROM audit_events',
    'TRUNCATE readings',
  ]) {
    await expect(test.database.asSystemRaw('test', (client) => client.query(statement))).rejects.toThrow(
      /permission denied/,
    )
  }
})

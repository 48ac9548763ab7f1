import { sql } from 'drizzle-orm'
import pg from 'pg'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import type { Tx } from '@/db/client'
import type { Role } from '@/lib/policy/roles'
import { type Scope, scopeOf, wallScopeOf } from '@/lib/policy/scope'
import { createTestDatabase, type TestDatabase } from '../../support/database'
import { makeSmallOrganization, type SmallOrganization } from '../../support/small-building'

/** Row-level security by itself: what a transaction sees with a scope, without a query's own WHERE. Expectations written by hand. */
let db: TestDatabase
let mill: SmallOrganization
let other: SmallOrganization

beforeAll(async () => {
  db = await createTestDatabase()
  mill = await makeSmallOrganization(db.database, 'mill')
  other = await makeSmallOrganization(db.database, 'other')
})
afterAll(() => db.drop())

const scope = (given: {
  roles: Role[]
  of?: SmallOrganization
  buildingIds?: number[]
  tenancyId?: number
}): Scope =>
  scopeOf({
    userId: 1,
    organizationId: (given.of ?? mill).organizationId,
    roles: given.roles,
    buildingIds: given.buildingIds ?? null,
    tenancyId: given.tenancyId ?? null,
  })

const column = async (tx: Tx, query: ReturnType<typeof sql>): Promise<unknown[]> =>
  (await tx.execute(query)).rows.map((row) => Object.values(row)[0])

const inScope = (given: Scope, query: ReturnType<typeof sql>) =>
  db.database.withScope(given, (tx) => column(tx, query))

const roomNames = sql`SELECT name FROM rooms ORDER BY number`
const readings = sql`SELECT m.name || ' ' || to_char(v.at, 'DD') FROM visible_readings v JOIN rooms m ON m.id = v.room_id
  ORDER BY m.number, v.at`
const latest = sql`SELECT m.name FROM visible_latest v JOIN rooms m ON m.id = v.room_id ORDER BY m.number`

describe('an operator of the organisation', () => {
  test('sees every room of it, and none of another organisation', async () => {
    expect(await inScope(scope({ roles: ['operator'] }), roomNames)).toEqual([
      'Hall',
      'Desk',
      'Studio',
      'Spare',
    ])
    const both = await db.database.asSystem('test', (tx) => column(tx, roomNames))
    expect(both).toHaveLength(8)
  })

  test('sees every reading, also of single-person rooms', async () => {
    const seen = await inScope(scope({ roles: ['operator'] }), readings)
    expect(seen).toEqual([
      'Hall 10',
      'Hall 12',
      'Desk 10',
      'Desk 12',
      'Studio 10',
      'Studio 12',
      'Spare 10',
      'Spare 12',
    ])
  })

  test('restricted to a building that is not here sees nothing of this one', async () => {
    const elsewhere = scope({ roles: ['operator'], buildingIds: [other.buildingId] })
    expect(await inScope(elsewhere, roomNames)).toEqual([])
    expect(await inScope(elsewhere, readings)).toEqual([])
    expect(await inScope(elsewhere, sql`SELECT name FROM buildings`)).toEqual([])
  })

  test('restricted to no building at all sees nothing', async () => {
    const none = scope({ roles: ['operator'], buildingIds: [] })
    expect(await inScope(none, roomNames)).toEqual([])
    expect(await inScope(none, readings)).toEqual([])
  })
})

describe('a tenant', () => {
  const weir = () => scope({ roles: ['tenant'], tenancyId: mill.tenancies.weir.id })
  const loom = () => scope({ roles: ['tenant'], tenancyId: mill.tenancies.loom.id })

  test('sees its own rooms and its own tenancy', async () => {
    expect(await inScope(weir(), roomNames)).toEqual(['Hall', 'Desk', 'Studio'])
    expect(await inScope(weir(), sql`SELECT name FROM tenancies`)).toEqual(['Weir'])
    expect(await inScope(loom(), roomNames)).toEqual(['Studio'])
  })

  test('sees readings only inside its period, and none of a single-person room', async () => {
    expect(await inScope(weir(), readings)).toEqual(['Hall 10', 'Hall 12', 'Studio 12'])
    expect(await inScope(loom(), readings)).toEqual(['Studio 10'])
  })

  test('sees the newest value of a room it holds now, not of one that it held', async () => {
    expect(await inScope(weir(), latest)).toEqual(['Hall', 'Studio'])
    expect(await inScope(loom(), latest)).toEqual([])
  })

  test('sees weekly figures of a single-person room that it holds', async () => {
    await db.database.asSystem('test: a week', (tx) =>
      tx.execute(sql`INSERT INTO room_weeks (organization_id, building_id, room_id, week_start, through_night, mode, days, decays,
        decays_refused, volume_m3, method_version, input_hash)
        SELECT organization_id, building_id, id, '2026-05-11', '2026-05-15', 'supply on', 5, 9, 1, 120, 'v', name FROM rooms
        WHERE organization_id = ${mill.organizationId}`),
    )
    const weeks = sql`SELECT input_hash FROM room_weeks ORDER BY input_hash`
    expect(await inScope(weir(), weeks)).toEqual(['Desk', 'Hall', 'Studio'])
    expect(await inScope(loom(), weeks)).toEqual([])
    expect(await inScope(scope({ roles: ['engineer'], of: other }), weeks)).toEqual([])
  })

  test('whose membership names no tenancy sees no room at all', async () => {
    expect(await inScope(scope({ roles: ['tenant'] }), roomNames)).toEqual([])
    expect(await inScope(scope({ roles: ['tenant'] }), readings)).toEqual([])
  })

  test('who is also an operator but bound to the tenancy stays inside it', async () => {
    const both = scope({ roles: ['tenant', 'operator'], tenancyId: mill.tenancies.weir.id })
    expect(await inScope(both, readings)).toEqual(['Hall 10', 'Hall 12', 'Studio 12'])
  })
})

test('a screen on a wall shows no live value of a single-person room', async () => {
  const wall = wallScopeOf(scope({ roles: ['operator'] }))
  expect(await inScope(wall, latest)).toEqual(['Hall', 'Studio', 'Spare'])
  expect(await inScope(scope({ roles: ['operator'] }), latest)).toEqual(['Hall', 'Desk', 'Studio', 'Spare'])
})

describe('the application role', () => {
  const asApp = async <T>(fn: (client: pg.Client) => Promise<T>): Promise<T> => {
    const client = new pg.Client({ connectionString: db.appUrl })
    await client.connect()
    try {
      return await fn(client)
    } finally {
      await client.end()
    }
  }

  test('without a scope sees no row of any table that belongs to someone', async () => {
    const counts = await asApp(async (client) => {
      const tables = await client.query<{ relname: string }>(
        `SELECT relname FROM pg_class WHERE relkind IN ('r', 'p', 'v') AND relnamespace = 'public'::regnamespace
         AND NOT relispartition AND has_table_privilege(oid, 'SELECT') ORDER BY relname`,
      )
      expect(tables.rows.length).toBeGreaterThan(25)
      const seen: [string, number][] = []
      for (const { relname } of tables.rows) {
        const { rows } = await client.query<{ n: number }>(`SELECT count(*)::int AS n FROM ${relname}`)
        seen.push([relname, rows[0]?.n ?? -1])
      }
      return seen
    })
    expect(counts.filter(([, n]) => n !== 0)).toEqual([])
  })

  test('cannot change or delete a reading or the audit trail, not even as the system', async () => {
    const attempts = [
      'UPDATE readings SET co2_ppm = 400',
      'DELETE FROM readings',
      'TRUNCATE readings',
      `UPDATE audit_events SET action = 'nothing'`,
      'DELETE FROM audit_events',
      'ALTER TABLE readings DISABLE ROW LEVEL SECURITY',
      'SET ROLE ebbmark_owner',
    ]
    for (const statement of attempts) {
      const refused = asApp(async (client) => {
        await client.query(`SELECT set_config('ebb.system', 'test', false)`)
        await client.query(statement)
      })
      await expect(refused, statement).rejects.toThrow(/permission denied|must be owner/)
    }
  })

  test('cannot write into another organisation or building', async () => {
    const write = (organizationId: number, buildingId: number) =>
      db.database.withScope(scope({ roles: ['administrator'], buildingIds: [mill.buildingId] }), (tx) =>
        tx.execute(
          sql`INSERT INTO floors (organization_id, building_id, name, ordinal) VALUES (${organizationId}, ${buildingId}, 'Loft', 3)`,
        ),
      )
    await expect(write(other.organizationId, other.buildingId)).rejects.toMatchObject({
      cause: { message: expect.stringMatching(/row-level security/) },
    })
    await expect(write(mill.organizationId, other.buildingId)).rejects.toMatchObject({
      cause: { message: expect.stringMatching(/row-level security/) },
    })
    await expect(write(mill.organizationId, mill.buildingId)).resolves.toBeDefined()
  })
})

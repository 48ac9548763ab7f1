import type { Database } from '@/db/client'

const RESULTS = [
  'decays',
  'night_runs',
  'room_weeks',
  'rate_changes',
  'findings',
  'decay_reviews',
  'digests',
] as const

/** Every row and column that jobs write, as text in order of id: two equal dumps mean that nothing changed. */
export async function dumpResults(database: Database): Promise<Record<string, string[]>> {
  return database.asSystemRaw('test: dump', async (client) => {
    const dump: Record<string, string[]> = {}
    for (const table of RESULTS) {
      const { rows } = await client.query(`SELECT to_jsonb(t)::text AS row FROM ${table} t ORDER BY id`)
      dump[table] = rows.map((row) => row.row as string)
    }
    return dump
  })
}

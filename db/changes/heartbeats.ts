import type { Database } from '../client'

export type Heartbeat = {
  id: string
  kind: 'broker' | 'ingest' | 'feeds' | 'jobs' | 'web' | 'demo'
  startedAt: Date
  at: Date
  info: Record<string, unknown>
}

/** Says that a background process lives; the first beat also clears those of its kind that have been silent for a day. */
export async function writeHeartbeat(database: Database, beat: Heartbeat): Promise<void> {
  await database.asSystemRaw('heartbeat', async (client) => {
    await client.query(
      `INSERT INTO worker_heartbeats (id, kind, started_at, at, info) VALUES ($1, $2, $3, $4, $5)
       ON CONFLICT (id) DO UPDATE SET at = excluded.at, info = excluded.info`,
      [beat.id, beat.kind, beat.startedAt, beat.at, JSON.stringify(beat.info)],
    )
    await client.query(
      `DELETE FROM worker_heartbeats WHERE kind = $1 AND id <> $2 AND at < $3::timestamptz - interval '1 day'`,
      [beat.kind, beat.id, beat.at],
    )
  })
}

/** Takes the heartbeat away: the process has ended in good order. */
export async function endHeartbeat(database: Database, id: string): Promise<void> {
  await database.asSystemRaw('heartbeat', (client) =>
    client.query('DELETE FROM worker_heartbeats WHERE id = $1', [id]),
  )
}

import pg from 'pg'
import type { TestDatabase } from './database'

export type QueuedJob = {
  task: string
  key: string | null
  payload: Record<string, unknown>
  attempts: number
  lastError: string | null
}

/** The jobs that wait or run now, in the order in which they were queued. Read as the owner: the queue is not the application's. */
export async function queuedJobs(test: TestDatabase): Promise<QueuedJob[]> {
  return asOwner(test, async (client) => {
    const { rows } =
      await client.query(`SELECT t.identifier AS task, j.key, j.payload, j.attempts, j.last_error AS "lastError"
      FROM graphile_worker._private_jobs j JOIN graphile_worker._private_tasks t ON t.id = j.task_id ORDER BY j.id`)
    return rows
  })
}

/** One statement as the owner of the queue. */
export async function asOwner<T>(test: TestDatabase, fn: (client: pg.Client) => Promise<T>): Promise<T> {
  const client = new pg.Client({ connectionString: test.ownerUrl })
  await client.connect()
  try {
    return await fn(client)
  } finally {
    await client.end()
  }
}

/** Waits until a condition holds, asking every 50 ms; fails with the words after 60 s. */
export async function until(words: string, holds: () => Promise<boolean>): Promise<void> {
  for (let tries = 0; tries < 1200; tries++) {
    if (await holds()) return
    await new Promise((resolve) => setTimeout(resolve, 50))
  }
  throw new Error(`waited in vain: ${words}`)
}

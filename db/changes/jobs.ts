import { sql } from 'drizzle-orm'
import type { Tx } from '../client'

/** Every task of the job runner with its payload. Dates are building-local, YYYY-MM-DD. */
export type JobPayloads = {
  'analyse-night': { buildingId: number; date: string }
  'analyse-history': { buildingId: number; fromDate: string; toDate: string }
  'judge-weeks': { buildingId: number; fromDate: string; toDate: string }
  'write-digests': { buildingId: number; weekStart: string }
  'send-digest': { deliveryId: number }
  'watch-sensors': { buildingId: number }
}

export type JobTask = keyof JobPayloads

/** What a job is known by: a second one of the same key replaces one that waits and follows one that runs. */
export const jobKeys: { [Task in JobTask]: (payload: JobPayloads[Task]) => string } = {
  'analyse-night': (p) => `analyse-night:${p.buildingId}:${p.date}`,
  'analyse-history': (p) => `analyse-history:${p.buildingId}`,
  'judge-weeks': (p) => `judge-weeks:${p.buildingId}:${p.fromDate}`,
  'write-digests': (p) => `write-digests:${p.buildingId}:${p.weekStart}`,
  'send-digest': (p) => `send-digest:${p.deliveryId}`,
  'watch-sensors': (p) => `watch-sensors:${p.buildingId}`,
}

/**
 * Queues a job in the running transaction: it exists exactly when the transaction commits. Jobs of one building run one after the other.
 * With `onlyIfAbsent`, a job of the same key that waits, runs or has failed for good is left as it is.
 */
export async function queueJob<Task extends JobTask>(
  tx: Tx,
  job: { task: Task; payload: JobPayloads[Task]; onlyIfAbsent?: boolean },
): Promise<void> {
  const key = jobKeys[job.task](job.payload)
  const queue = 'buildingId' in job.payload ? `building ${job.payload.buildingId}` : null
  await tx.execute(
    sql`SELECT queue_job(${job.task}, ${JSON.stringify(job.payload)}::json, ${key}, ${queue}, ${job.onlyIfAbsent ?? false})`,
  )
}

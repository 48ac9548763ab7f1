import type { z } from 'zod'
import type { JobPayloads, JobTask } from '@/db/changes/jobs'
import type { Database } from '@/db/client'
import type { Clock } from '@/lib/server/clock'
import type { Mailer } from '@/lib/server/mail/mailer'

/** What every job is given. */
export type JobContext = {
  database: Database
  clock: Clock
  mailer: Mailer
  /** where links in mail lead */
  publicUrl: string
  /** true once the process is to end: long jobs stop at their next whole step */
  stopped: () => boolean
  /** attempts made, this one included, and how many there may be */
  attempt: { number: number; last: boolean }
}

/** A job that others queue with a payload. */
export type Job<Task extends JobTask> = {
  task: Task
  payload: z.ZodType<JobPayloads[Task]>
  run: (payload: JobPayloads[Task], context: JobContext) => Promise<void>
}

/** A job that the schedule alone starts. */
export type ScheduledJob = { task: string; run: (context: JobContext) => Promise<void> }

/** Names a job's parts for the type checker. */
export function defineJob<Task extends JobTask>(job: Job<Task>): Job<Task> {
  return job
}

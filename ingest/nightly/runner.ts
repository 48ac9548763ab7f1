import { EventEmitter } from 'node:events'
import {
  Logger,
  makeWorkerUtils,
  parseCronItems,
  run,
  type TaskList,
  type WorkerEvents,
} from 'graphile-worker'
import type { Logger as Log } from 'pino'
import { endHeartbeat } from '@/db/changes/heartbeats'
import type { JobTask } from '@/db/changes/jobs'
import { startHeartbeat } from './heartbeat'
import type { Job, JobContext, ScheduledJob } from './job'
import { queuedJobs, scheduledJobs } from './jobs'
import { schedule } from './schedule'

export type RunnerOptions = Omit<JobContext, 'attempt' | 'stopped'> & {
  /** the owner's address: the queue's schema is not the application's */
  ownerUrl: string
  log: Log
  concurrency?: number
  /** without the schedule only what is queued runs: for tests */
  scheduled?: boolean
}

export type JobRunner = {
  workerId: string
  /** Ends after the jobs in hand; jobs that take too long are given back to the queue. */
  stop: () => Promise<void>
  /** settles when the runner ends for any reason */
  ended: Promise<void>
}

type Base = Omit<JobContext, 'attempt'> & { log: Log }

type Helpers = { job: { attempts: number; max_attempts: number } }

const contextFor = ({ log: _, ...base }: Base, { job }: Helpers): JobContext => ({
  ...base,
  attempt: { number: job.attempts, last: job.attempts >= job.max_attempts },
})

/** A queued job as the queue's library takes it. A payload that does not parse is a final error: it is told and not tried again. */
function queuedTask<Task extends JobTask>(job: Job<Task>, base: Base) {
  return async (payload: unknown, helpers: Helpers) => {
    const parsed = job.payload.safeParse(payload)
    if (!parsed.success) {
      base.log.error(
        { task: job.task, payload, problems: parsed.error.issues },
        'a job has no usable payload',
      )
      return
    }
    const startedMs = Date.now()
    await job.run(parsed.data, contextFor(base, helpers))
    const told: object = { task: job.task, ...parsed.data, ms: Date.now() - startedMs }
    base.log.info(told, 'job done')
  }
}

function taskList(base: Base): TaskList {
  const queued = queuedJobs.map((job) => [job.task, queuedTask(job as Job<JobTask>, base)])
  const scheduled = scheduledJobs.map((job: ScheduledJob) => [
    job.task,
    (_: unknown, helpers: Helpers) => job.run(contextFor(base, helpers)),
  ])
  return Object.fromEntries([...queued, ...scheduled])
}

const levels: Record<string, 'error' | 'warn' | 'debug'> = { error: 'error', warning: 'warn' }

/** The queue's own messages in our log: errors and warnings as such, the rest for those who look for it. */
const queueLogger = (log: Log) =>
  new Logger(() => (level, message, meta) => {
    const error = meta?.error instanceof Error ? meta.error : undefined
    log[levels[level] ?? 'debug']({ err: error }, String(message))
  })

/** Starts working on the queue: jobs that wait and, by the schedule, those that time brings. Safe to run several on one database. */
export async function startJobs(options: RunnerOptions): Promise<JobRunner> {
  const { database, clock, mailer, publicUrl, ownerUrl, log } = options
  let stopping = false
  const base = { database, clock, mailer, publicUrl, log, stopped: () => stopping }
  const shared = { connectionString: ownerUrl, logger: queueLogger(log) }
  const utils = await makeWorkerUtils({ ...shared, maxPoolSize: 2 })
  const events: WorkerEvents = new EventEmitter()
  const pool = new Promise<string>((resolve) =>
    events.once('pool:create', ({ workerPool }) => resolve(workerPool.id)),
  )
  const runner = await run({
    ...shared,
    events,
    concurrency: options.concurrency ?? 2,
    maxPoolSize: 5,
    noHandleSignals: true,
    gracefulShutdownAbortTimeout: 6000,
    taskList: {
      ...taskList(base),
      'clean-queue': () => utils.cleanup({ tasks: ['DELETE_PERMAFAILED_JOBS', 'GC_JOB_QUEUES'] }),
    },
    parsedCronItems: options.scheduled === false ? [] : cronItems(),
  })
  const workerId = await pool
  const onError = (error: unknown) => log.warn({ err: error }, 'a heartbeat of the job runner was lost')
  const endBeat = await startHeartbeat({ database, clock, utils, workerId, onError })
  return {
    workerId,
    ended: runner.promise,
    stop: async () => {
      stopping = true
      endBeat()
      await runner.stop()
      await endHeartbeat(database, workerId).catch(onError)
      await utils.release()
    },
  }
}

/** The schedule for the queue's library; a tick missed while no runner ran is not made up for, because the next one sees all that is due. */
function cronItems() {
  const options = { maxAttempts: 3 }
  return parseCronItems([
    ...schedule.map(({ task, cron }) => ({ task, match: cron, options })),
    { task: 'clean-queue', match: '5 * * * *', options },
  ])
}

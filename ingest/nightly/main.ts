/** The job runner's process. Ends within 10 s on SIGTERM, and at once when the process that started it is gone. */

import { systemClock } from '@/lib/server/clock'
import { database } from '@/lib/server/database'
import { env, publicUrl } from '@/lib/server/env'
import { log } from '@/lib/server/log'
import { mailer } from '@/lib/server/mail/mailer'
import { tick } from './jobs/tick'
import { startJobs } from './runner'

const FORCED_END_MS = 9000

async function main(): Promise<void> {
  const { DATABASE_OWNER_URL, DATABASE_DIRECT_URL, DATABASE_URL } = env()
  const runner = await startJobs({
    ownerUrl: DATABASE_OWNER_URL ?? DATABASE_DIRECT_URL ?? DATABASE_URL,
    database: database(),
    clock: systemClock,
    log: log(),
    mailer: mailer(),
    publicUrl: publicUrl(),
  })
  const end = (signal: string) => {
    log().info({ signal }, 'the job runner ends after the jobs in hand')
    setTimeout(() => {
      log().warn('jobs took too long; they are given to the next runner')
      process.exit(1)
    }, FORCED_END_MS).unref()
    void runner
      .stop()
      .then(() => database().close())
      .then(
        () => process.exit(0),
        (error) => {
          log().error({ err: error }, 'the job runner did not end in good order')
          process.exit(1)
        },
      )
  }
  process.once('SIGTERM', () => end('SIGTERM'))
  process.once('SIGINT', () => end('SIGINT'))
  process.on('disconnect', () => process.exit(0))
  runner.ended.catch((error) => {
    log().error({ err: error }, 'the job runner lost its queue')
    process.exit(1)
  })
  // what fell due while no runner ran need not wait for the next ten minutes
  await tick({
    database: database(),
    clock: systemClock,
    readingsKeptDays: env().EBBMARK_READINGS_KEPT_DAYS ?? null,
  })
  log().info({ worker: runner.workerId }, 'the job runner is ready')
  process.send?.({ ready: true })
}

main().catch((error) => {
  log().fatal({ err: error }, 'the job runner could not start')
  process.exit(1)
})

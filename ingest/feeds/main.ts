/** The feeds of the deployment: subscriptions to brokers of other systems, their messages mapped to readings and stored. */
import { Credentials } from '../worker/credentials'
import { runIngestProcess } from '../worker/process'
import { FeedRunner } from './runner'

await runIngestProcess('feeds', 'feeds', async ({ database, ingest, log, nowMs, id }) => {
  const credentials = new Credentials(database, nowMs)
  const runner = new FeedRunner({ database, ingest, log, nowMs, id, credentials, random: Math.random })
  runner.start()
  return {
    info: () => ({ feeds: runner.count }),
    onNotice: (notice) => {
      if (notice === null || notice.kind === 'sensors') credentials.forget()
      if (notice === null || notice.kind === 'feeds') runner.reconcile()
    },
    stopTaking: () => runner.stopTaking(),
    stop: () => runner.stop(),
  }
})

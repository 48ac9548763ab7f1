import { authSecret, env, tellNextAuthItsAddress } from './env'
import { closeAllStreams } from './live/streams'
import { log } from './log'

/**
 * What the web server's process needs besides the pages: a checked environment, an end that open event streams do not hold up, and
 * errors that nobody caught in the log.
 */
export function startWebProcess(): void {
  env()
  authSecret()
  tellNextAuthItsAddress()
  for (const signal of ['SIGTERM', 'SIGINT'] as const) {
    process.on(signal, () => {
      log().info({ signal }, 'the web server ends')
      closeAllStreams()
    })
  }
  process.on('uncaughtException', (error) => log().error({ err: error }, 'an error nobody caught'))
  process.on('unhandledRejection', (error) => log().error({ err: error }, 'a rejection nobody handled'))
}

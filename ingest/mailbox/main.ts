/** The local mailbox's process: started where no mail server is named in the environment. */
import { env } from '@/lib/server/env'
import { log } from '@/lib/server/log'
import { mailboxDir } from '@/lib/server/mail/mailbox'
import { startMailbox } from './server'

const FORCED_END_MS = 3000

async function main(): Promise<void> {
  const { SMTP_HOST, SMTP_PORT } = env()
  const mailbox = await startMailbox({
    dir: mailboxDir(),
    host: SMTP_HOST,
    port: SMTP_PORT,
    onError: (error) => log().warn({ err: error }, 'a connection to the local mailbox failed'),
  })
  const end = () => {
    setTimeout(() => process.exit(0), FORCED_END_MS).unref()
    void mailbox.close().then(() => process.exit(0))
  }
  process.once('SIGTERM', end)
  process.once('SIGINT', end)
  process.on('disconnect', () => process.exit(0))
  log().info({ port: mailbox.port, dir: mailboxDir() }, 'the local mailbox is ready')
  process.send?.({ ready: true, port: mailbox.port })
}

main().catch((error) => {
  log().fatal({ err: error }, 'the local mailbox could not start')
  process.exit(1)
})

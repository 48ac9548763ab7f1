import type { Logger } from 'pino'
import type { BrokerAddress } from '@/lib/server/mqtt/address'
import { Connection, type ConnectionOptions } from '@/lib/server/mqtt/connection'
import { pause } from './pause'
import { RECEIVE_MAXIMUM, SESSION_EXPIRY_S, SHARED_FILTER, workerClientId } from './shared'

/** Worker numbers beyond the present ones that are looked at. */
const NUMBERS_BEYOND = 8
/** A queue that stays empty this long is at its end. */
const EMPTY_MS = 2000

/**
 * After fewer workers were started than before, the broker still holds the queues of those that are gone. Worker 1 connects once as each
 * of them: where the broker knows the session, it takes the subscription away, stores what is queued, and gives the session up.
 */
export async function drainOlderSessions(options: {
  address: BrokerAddress
  prefix: string
  workers: number
  onMessage: ConnectionOptions['onMessage']
  log: Logger
}): Promise<void> {
  for (let number = options.workers + 1; number <= options.workers + NUMBERS_BEYOND; number++) {
    const clientId = workerClientId(options.prefix, number)
    try {
      const messages = await drain({ ...options, clientId })
      if (messages !== undefined)
        options.log.info({ clientId, messages }, 'took over the queue of a worker that is gone')
    } catch (error) {
      options.log.warn(
        { clientId, err: (error as Error).message },
        'the queue of an earlier worker was not looked at',
      )
      return
    }
  }
}

/** The number of messages taken over, or undefined where the broker knows no such session. */
async function drain(
  options: Pick<ConnectionOptions, 'address' | 'clientId' | 'onMessage'>,
): Promise<number | undefined> {
  let messages = 0
  let heardMs = performance.now()
  const connection = new Connection({
    ...options,
    filter: SHARED_FILTER,
    drains: true,
    version: 5,
    receiveMaximum: RECEIVE_MAXIMUM,
    sessionExpiryS: SESSION_EXPIRY_S,
    onMessage: (message, settle) => {
      messages++
      heardMs = performance.now()
      options.onMessage({ ...message, held: true }, settle)
    },
  })
  const resumed = await connection.opened
  while (resumed && (performance.now() - heardMs < EMPTY_MS || connection.outstanding > 0)) await pause(100)
  connection.leave(true)
  await connection.closed
  return resumed ? messages : undefined
}

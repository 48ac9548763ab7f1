import pg from 'pg'
import { LIVE_CHANNEL, type LiveNotice, parseLiveNotice } from '@/lib/wire/live'

export type Listener = { stop: () => Promise<void> }

/**
 * Listens for live notices on a connection of its own and comes back by itself after a loss. `onConnected` is called after each
 * (re)connect: notices in between are lost, so the caller must read again what it holds. `url` must not go through a pooler that hands a
 * connection from one transaction to the next.
 */
export function listenLive(options: {
  url: string
  applicationName: string
  onNotice: (notice: LiveNotice) => void
  onConnected: () => void
  onLost?: (error: Error) => void
}): Listener {
  let client: pg.Client | undefined
  let timer: NodeJS.Timeout | undefined
  let stopped = false
  let tries = 0

  const lost = (of: pg.Client, error: Error) => {
    if (client !== of) return
    client = undefined
    of.end().catch(() => undefined)
    if (stopped) return
    options.onLost?.(error)
    timer = setTimeout(connect, Math.min(5000, 200 * 2 ** tries++))
  }
  const connect = () => {
    const opened = new pg.Client({
      connectionString: options.url,
      application_name: options.applicationName,
      connectionTimeoutMillis: 5000,
      keepAlive: true,
    })
    client = opened
    opened.on('error', (error) => lost(opened, error))
    opened.on('end', () => lost(opened, new Error('the connection ended')))
    opened.on('notification', (message) => {
      const notice = parseLiveNotice(message.payload)
      if (notice) options.onNotice(notice)
    })
    opened
      .connect()
      .then(() => opened.query(`LISTEN ${LIVE_CHANNEL}`))
      .then(() => {
        tries = 0
        options.onConnected()
      })
      .catch((error: Error) => lost(opened, error))
  }
  connect()
  return {
    stop: async () => {
      stopped = true
      clearTimeout(timer)
      const open = client
      client = undefined
      await open?.end().catch(() => undefined)
    },
  }
}

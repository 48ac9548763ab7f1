import type { Database } from '@/db/client'
import { LIVE_CHANNEL, liveNotice } from '@/lib/wire/live'

export type LiveNotifier = {
  /** Says that readings of these buildings were committed. */
  touch: (buildingIds: Iterable<number>) => void
  stop: () => void
}

/**
 * Tells open screens of new readings: at once, then at most once in `intervalMs` with all buildings since. After the commit and in its
 * own transaction, so that a screen that reads on the notice finds the rows, and a failing notice costs no reading.
 */
export function createLiveNotifier(database: Database, intervalMs = 250): LiveNotifier {
  let waiting = new Set<number>()
  let timer: NodeJS.Timeout | undefined
  let stopped = false

  const send = async () => {
    const buildings = waiting
    waiting = new Set()
    const payload = JSON.stringify(liveNotice('readings', buildings))
    try {
      await database.asSystemRaw('live', (client) =>
        client.query('SELECT pg_notify($1, $2)', [LIVE_CHANNEL, payload]),
      )
    } catch {
      // the database is away: screens are told with the next commit
      for (const id of buildings) waiting.add(id)
    }
  }
  const tick = () => {
    timer = undefined
    if (waiting.size === 0 || stopped) return
    timer = setTimeout(tick, intervalMs)
    void send()
  }
  return {
    touch: (buildingIds) => {
      for (const id of buildingIds) waiting.add(id)
      if (!timer) tick()
    },
    stop: () => {
      stopped = true
      clearTimeout(timer)
    },
  }
}

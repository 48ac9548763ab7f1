import type { WorkerUtils } from 'graphile-worker'
import { writeHeartbeat } from '@/db/changes/heartbeats'
import { removeHeartbeats } from '@/db/changes/workers'
import type { Database } from '@/db/client'
import { silentWorkers } from '@/db/queries/workers'
import type { Clock } from '@/lib/server/clock'

const BEAT_MS = 15_000
/** A runner that has said nothing for so long is taken for dead and its jobs are given to others. */
export const SILENT_MS = 60_000

export type HeartbeatOptions = {
  database: Database
  clock: Clock
  utils: Pick<WorkerUtils, 'forceUnlockWorkers'>
  /** the name that the queue locks jobs under */
  workerId: string
  onError: (error: unknown) => void
}

/** Frees the jobs of runners that have gone silent, which the queue alone would hold for four hours. Returns their names. */
export async function releaseSilentWorkers({
  database,
  clock,
  utils,
  workerId,
}: Omit<HeartbeatOptions, 'onError'>): Promise<string[]> {
  const before = new Date(clock.now().getTime() - SILENT_MS)
  const silent = await database.asSystem('release silent', (tx) =>
    silentWorkers(tx, { kind: 'jobs', before, except: workerId }),
  )
  if (silent.length === 0) return []
  await utils.forceUnlockWorkers(silent)
  await database.asSystem('release silent', (tx) => removeHeartbeats(tx, { ids: silent, before }))
  return silent
}

/** Says every 15 s that this runner lives, and looks after those that do not. Returns the end of it. */
export async function startHeartbeat(options: HeartbeatOptions): Promise<() => void> {
  const { database, clock, workerId } = options
  const startedAt = clock.now()
  const beat = async () => {
    await writeHeartbeat(database, {
      id: workerId,
      kind: 'jobs',
      startedAt,
      at: clock.now(),
      info: { pid: process.pid },
    })
    await releaseSilentWorkers(options)
  }
  await beat()
  const timer = setInterval(() => beat().catch(options.onError), BEAT_MS)
  return () => clearInterval(timer)
}

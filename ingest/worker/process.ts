import os from 'node:os'
import type { Logger } from 'pino'
import { endHeartbeat, type Heartbeat, writeHeartbeat } from '@/db/changes/heartbeats'
import { type Database, openDatabase } from '@/db/client'
import { listenLive } from '@/db/listen'
import { env } from '@/lib/server/env'
import { log } from '@/lib/server/log'
import type { LiveNotice } from '@/lib/wire/live'
import { Ingest } from './ingest'
import { within } from './pause'

/** A database that hangs is given up on after this; the batch's own deadline is shorter. */
const queryTimeoutMs = 8000
const heartbeatMs = 10_000
/** A stop ends within the 10 s that the stack waits: this long for the batch in hand. */
const stopGraceMs = 6000

export type IngestParts = { database: Database; ingest: Ingest; log: Logger; nowMs: () => number; id: string }

/** What a process adds to the common frame. */
export type IngestWork = {
  /** for the heartbeat, beside the ingest's own counters */
  info: () => Record<string, unknown>
  /** a notice has come; null after each (re)connect of the listener, when notices may have been missed */
  onNotice: (notice: LiveNotice | null) => void
  /** first stage of a stop: takes nothing new */
  stopTaking: () => void
  /** second stage, after the last commit: acknowledges and leaves */
  stop: () => Promise<void>
}

/**
 * The frame of a process that stores readings: database, ingest, heartbeat, notices, and a stop in two stages (take nothing new, commit
 * and acknowledge what is in hand). A second signal ends at once.
 */
export async function runIngestProcess(
  name: string,
  kind: Heartbeat['kind'],
  open: (parts: IngestParts) => Promise<IngestWork>,
): Promise<void> {
  const startedAt = new Date()
  const id = `${name} ${os.hostname()} ${process.pid} ${startedAt.getTime()}`
  const settings = env()
  const logger = log().child({ process: name })
  const nowMs = () => Date.now()
  const database = openDatabase({
    url: settings.DATABASE_URL,
    poolSize: 6,
    applicationName: `ebbmark ${name}`,
    queryTimeoutMs,
    onError: (error) => logger.warn({ err: error.message }, 'an idle database connection was lost'),
  })
  let work: IngestWork | undefined
  const beat = (): Promise<void> =>
    writeHeartbeat(database, {
      id,
      kind,
      startedAt,
      at: new Date(),
      info: { ...ingest.counters, ...work?.info() },
    })
  const ingest = new Ingest({ database, log: logger, nowMs, random: Math.random, probe: beat })
  const listener = listenLive({
    url: settings.DATABASE_DIRECT_URL ?? settings.DATABASE_URL,
    applicationName: `ebbmark ${name} listen`,
    onNotice: (notice) => work?.onNotice(notice),
    onConnected: () => work?.onNotice(null),
    onLost: (error) => logger.warn({ err: error.message }, 'the notice connection was lost'),
  })
  const beats = setInterval(
    () => void beat().catch((error: Error) => logger.warn({ err: error.message }, 'no heartbeat written')),
    heartbeatMs,
  )

  let stopping = false
  const stop = async (why: string) => {
    if (stopping) process.exit(1)
    stopping = true
    logger.info({ why }, 'stopping: committing what is in hand')
    clearInterval(beats)
    work?.stopTaking()
    await ingest.stop(stopGraceMs)
    await within(work?.stop() ?? Promise.resolve(), 1000)
    const farewell = endHeartbeat(database, id).catch(() => undefined)
    await within(Promise.all([listener.stop(), farewell]), 1000)
    await within(
      database.close().catch(() => undefined),
      500,
    )
    logger.info({ ...ingest.counters }, 'stopped')
    process.exit(0)
  }
  process.on('SIGTERM', () => void stop('SIGTERM'))
  process.on('SIGINT', () => void stop('SIGINT'))
  process.on('disconnect', () => void stop('the parent process has gone'))

  try {
    work = await open({ database, ingest, log: logger, nowMs, id })
  } catch (error) {
    logger.fatal({ err: (error as Error).message }, `the ${name} process could not start`)
    process.exit(1)
  }
  work.onNotice(null)
  await beat().catch((error: Error) => logger.warn({ err: error.message }, 'no heartbeat written'))
  process.send?.({ ready: true })
}

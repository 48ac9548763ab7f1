/** The MQTT broker with the ingest inside: one process. */
import os from 'node:os'
import { endHeartbeat, writeHeartbeat } from '@/db/changes/heartbeats'
import { openDatabase } from '@/db/client'
import { listenLive } from '@/db/listen'
import { env } from '@/lib/server/env'
import { log } from '@/lib/server/log'
import { Credentials } from '../worker/credentials'
import { Ingest } from '../worker/ingest'
import { within } from '../worker/pause'
import { Broker } from './broker'
import { LIMITS } from './limits'

/** A database that hangs is given up on after this; the batch's own deadline is shorter. */
const queryTimeoutMs = 8000
const heartbeatMs = 10_000
/** A stop ends within the 10 s that the stack waits: this long for the batch in hand. */
const stopGraceMs = 6000

const startedAt = new Date()
const id = `broker ${os.hostname()} ${process.pid} ${startedAt.getTime()}`
const settings = env()
const logger = log().child({ process: 'broker' })
const nowMs = () => Date.now()

const database = openDatabase({
  url: settings.DATABASE_URL,
  poolSize: 6,
  applicationName: 'ebbmark broker',
  queryTimeoutMs,
  onError: (error) => logger.warn({ err: error.message }, 'an idle database connection was lost'),
})
const beat = () =>
  writeHeartbeat(database, {
    id,
    kind: 'broker',
    startedAt,
    at: new Date(),
    info: { ...ingest.counters, connections: broker.connections, port: settings.MQTT_PORT },
  })
const ingest = new Ingest({ database, log: logger, nowMs, random: Math.random, probe: beat })
const credentials = new Credentials(database, nowMs)
const broker = new Broker({
  host: settings.MQTT_HOST,
  port: settings.MQTT_PORT,
  ingest,
  credentials,
  log: logger,
  nowMs,
  readingsPerS: settings.MQTT_SENSOR_READINGS_PER_S,
})

const recheck = () => {
  credentials.forget()
  broker
    .recheck()
    .catch((error: Error) => logger.warn({ err: error.message }, 'connected devices were not checked'))
}
const listener = listenLive({
  url: settings.DATABASE_DIRECT_URL ?? settings.DATABASE_URL,
  applicationName: 'ebbmark broker listen',
  onNotice: (notice) => {
    if (notice.kind === 'sensors') recheck()
  },
  onConnected: recheck,
  onLost: (error) => logger.warn({ err: error.message }, 'the notice connection was lost'),
})

let isBeating = false
const beats = setInterval(() => {
  if (isBeating) return
  isBeating = true
  beat()
    .catch((error: Error) => logger.warn({ err: error.message }, 'no heartbeat written'))
    .finally(() => {
      isBeating = false
    })
}, heartbeatMs)
const rechecks = setInterval(recheck, LIMITS.recheckMs)

let stopping = false
/** Takes nothing new, commits and acknowledges what is in hand, then closes. A second signal ends at once. */
async function stop(why: string): Promise<void> {
  if (stopping) process.exit(1)
  stopping = true
  logger.info({ why }, 'stopping: committing what is in hand')
  clearInterval(beats)
  clearInterval(rechecks)
  broker.refuseNew()
  await ingest.stop(stopGraceMs)
  await within(broker.stop(), 1000)
  const farewell = endHeartbeat(database, id).catch((error: Error) =>
    logger.warn({ err: error.message }, 'the heartbeat was not taken away'),
  )
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

broker
  .start()
  .then(async () => {
    logger.info({ host: settings.MQTT_HOST, port: settings.MQTT_PORT }, 'MQTT broker listens')
    await beat().catch((error: Error) => logger.warn({ err: error.message }, 'no heartbeat written'))
    process.send?.({ ready: true, port: settings.MQTT_PORT })
  })
  .catch((error: NodeJS.ErrnoException) => {
    const taken = error.code === 'EADDRINUSE'
    logger.fatal(
      { err: error.message },
      taken
        ? `port ${settings.MQTT_PORT} on ${settings.MQTT_HOST} is taken: stop what uses it, or set MQTT_PORT`
        : 'the MQTT broker could not start',
    )
    process.exit(1)
  })

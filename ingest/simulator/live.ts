/** The demo building's sensors: fills the record up to now, then publishes as thirty MQTT clients. One process. */
import path from 'node:path'
import { endHeartbeat, writeHeartbeat } from '@/db/changes/heartbeats'
import { openDatabase } from '@/db/client'
import { env } from '@/lib/server/env'
import { log } from '@/lib/server/log'
import { demoKey, keepState, sensorSecret, writeTruth } from './demo-files'
import { LiveMill, wallClock } from './live/mill'
import { SensorClient } from './live/sensor-client'
import { type SeededDemo, seedDemo } from './load'
import { truthOf } from './truth'

const HEARTBEAT_MS = 30_000
const STOP_WITHIN_MS = 3000

const settings = env()
const logger = log().child({ process: 'demo' })
const startedAt = new Date()
const database = openDatabase({
  url: settings.DATABASE_URL,
  poolSize: 2,
  applicationName: 'ebbmark demo',
  onError: (error) => logger.warn({ err: error.message }, 'an idle database connection was lost'),
})

/** Connections of the sensors that are on the air: neither retired nor silent by the story. */
function connectSensors(demo: SeededDemo): (SensorClient | null)[] {
  const { scenario, story } = demo.world
  const key = demoKey(settings.EBBMARK_DATA_DIR)
  const silent = story.switches.silentSensor ? story.silentSensor.deviceId : null
  return scenario.sensors.map(({ deviceId }, i) => {
    if (demo.sensorIds[i] === null || deviceId === silent) return null
    return new SensorClient({
      url: `mqtt://${settings.MQTT_HOST}:${settings.MQTT_PORT}`,
      site: scenario.building.slug,
      deviceId,
      secret: sensorSecret(key, deviceId),
      onTrouble: (words) => logger.warn({ sensor: deviceId }, words),
    })
  })
}

function startBeating(clients: readonly (SensorClient | null)[]): () => Promise<void> {
  const id = `demo:${process.pid}:${startedAt.getTime()}`
  const on = clients.filter((client) => client !== null)
  const beat = () =>
    writeHeartbeat(database, {
      id,
      kind: 'demo',
      startedAt,
      at: new Date(),
      info: {
        connected: on.filter((client) => client.isConnected).length,
        waiting: on.reduce((sum, client) => sum + client.waiting, 0),
        acknowledged: on.reduce((sum, client) => sum + client.acknowledged, 0),
      },
    }).catch((error: Error) => logger.warn({ err: error.message }, 'no heartbeat written'))
  const timer = setInterval(beat, HEARTBEAT_MS)
  void beat()
  return async () => {
    clearInterval(timer)
    await endHeartbeat(database, id).catch(() => undefined)
  }
}

async function main(): Promise<void> {
  const dataDir = settings.EBBMARK_DATA_DIR
  const demo = await seedDemo({ database, dataDir, now: new Date() })
  logger.info({ added: demo.readingsAdded }, 'the record is whole; publishing')
  const clients = connectSensors(demo)
  const stopBeating = startBeating(clients)
  let truthDay = demo.world.local.at(demo.filledToS).day
  const mill = new LiveMill(demo.world, demo.state, clients, wallClock(), (state) => {
    keepState(dataDir, demo.birth, state)
    const { day } = demo.world.local.at(state.minute * 60)
    if (day === truthDay) return
    truthDay = day
    writeTruth(
      path.join(dataDir, 'demo-truth.json'),
      truthOf(demo.world, demo.world.historyStartS, state.minute * 60),
    )
  })
  mill.start()
  onStop(async () => {
    keepState(dataDir, demo.birth, mill.stop())
    await Promise.all(clients.map((client) => client?.end(STOP_WITHIN_MS)))
    await stopBeating()
    await database.close()
  })
  process.send?.({ ready: true })
}

/** Ends in order on the first signal, or when the process that started this one has gone; a second signal does not wait. */
function onStop(stop: () => Promise<void>): void {
  let isStopping = false
  const begin = () => {
    if (isStopping) return
    isStopping = true
    stop().then(
      () => process.exit(0),
      () => process.exit(1),
    )
  }
  let signals = 0
  for (const signal of ['SIGTERM', 'SIGINT'] as const)
    process.on(signal, () => {
      signals += 1
      if (signals > 1) process.exit(1)
      begin()
    })
  process.on('disconnect', begin)
}

main().catch((error: Error) => {
  logger.fatal({ err: error.message }, 'the demo building could not start')
  process.exit(1)
})

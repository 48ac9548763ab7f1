/** One ingest worker beside an outside broker: a share of the messages of one shared subscription, acknowledged after the commit. */
import { env } from '@/lib/server/env'
import { parseBrokerUrl, readCaFile } from '@/lib/server/mqtt/address'
import { Credentials } from './credentials'
import { drainOlderSessions } from './drain'
import { type IngestParts, type IngestWork, runIngestProcess } from './process'
import { filtersFor, RECEIVE_MAXIMUM, SESSION_EXPIRY_S, workerClientId } from './shared'
import { Subscriber } from './subscriber'
import { TopicIntake } from './topic-intake'

await runIngestProcess(`worker ${env().INGEST_WORKER}`, 'ingest', open)

async function open({ database, ingest, log, nowMs }: IngestParts): Promise<IngestWork> {
  const { MQTT_URL, MQTT_CA_FILE, MQTT_CLIENT_ID, INGEST_WORKER, INGEST_WORKERS } = env()
  if (!MQTT_URL)
    throw new Error('MQTT_URL is not set: a worker needs the address of a broker (mqtt://host:port).')
  const address = parseBrokerUrl(MQTT_URL, MQTT_CA_FILE ? readCaFile(MQTT_CA_FILE) : undefined)
  const credentials = new Credentials(database, nowMs)
  const intake = new TopicIntake({ ingest, credentials, nowMs })
  const onMessage: TopicIntake['take'] = (message, settle) => intake.take(message, settle)
  const at = `${address.tls ? 'mqtts' : 'mqtt'}://${address.host}:${address.port}`
  const subscriber = new Subscriber({
    address,
    clientId: workerClientId(MQTT_CLIENT_ID, INGEST_WORKER),
    ...filtersFor(INGEST_WORKERS),
    receiveMaximum: RECEIVE_MAXIMUM,
    sessionExpiryS: SESSION_EXPIRY_S,
    acceptsOlder: false,
    isReady: () => ingest.isOpen,
    random: Math.random,
    onMessage,
    onState: (state) => {
      if (state.connected) log.info({ broker: at, resumed: state.resumed }, 'subscribed')
      else log.warn({ broker: at, err: state.why }, 'not connected to the broker; trying again')
    },
  })
  subscriber.start()
  if (INGEST_WORKER === 1)
    void drainOlderSessions({ address, prefix: MQTT_CLIENT_ID, workers: INGEST_WORKERS, onMessage, log })
  return {
    info: () => ({ broker: at, connected: subscriber.isConnected, outstanding: subscriber.outstanding }),
    onNotice: (notice) => {
      if (notice === null || notice.kind === 'sensors') credentials.forget()
    },
    stopTaking: () => subscriber.stopTaking(),
    stop: () => subscriber.stop(),
  }
}

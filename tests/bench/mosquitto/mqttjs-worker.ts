/** The way not taken, kept to be measured: many sessions of the MQTT client library on one shared subscription, each waiting for the common batch. */
import mqtt from 'mqtt'
import { env } from '@/lib/server/env'
import { Credentials } from '../../../ingest/worker/credentials'
import { runIngestProcess } from '../../../ingest/worker/process'
import { SHARED_FILTER } from '../../../ingest/worker/shared'
import { TopicIntake } from '../../../ingest/worker/topic-intake'

const sessions = Number(process.argv[2])

await runIngestProcess('mqtt.js worker', 'ingest', async ({ database, ingest, nowMs }) => {
  const credentials = new Credentials(database, nowMs)
  const intake = new TopicIntake({ ingest, credentials, nowMs })
  const clients = await Promise.all(
    Array.from({ length: sessions }, async (_, index) => {
      const client = mqtt.connect(env().MQTT_URL!, {
        protocolVersion: 5,
        clientId: `mqttjs-${index}`,
        clean: false,
        properties: { sessionExpiryInterval: 60, receiveMaximum: 50 },
        manualConnect: true,
      })
      client.handleMessage = (packet, done) => {
        const payload = typeof packet.payload === 'string' ? Buffer.from(packet.payload) : packet.payload
        intake.take({ topic: packet.topic, payload, retain: packet.retain, held: false }, (outcome) =>
          outcome === 'committed' ? done() : client.reconnect(),
        )
      }
      client.connect()
      await new Promise((resolve) => client.once('connect', resolve))
      await client.subscribeAsync(SHARED_FILTER, { qos: 1 })
      return client
    }),
  )
  return {
    info: () => ({}),
    onNotice: () => undefined,
    stopTaking: () => undefined,
    stop: async () => {
      await Promise.all(clients.map((client) => client.endAsync(true)))
    },
  }
})

// One publisher process: sends readings of one sensor with QoS 1 and tells its parent which were acknowledged. Plain Node, for quick starts.
import mqtt from 'mqtt'

const { port, deviceId, secret, topic, salt, baseMs, everyMs, windowMax, keepaliveS } = JSON.parse(
  process.argv[2],
)

/** The value of reading `i`: quarters of ppm, exact in single precision. */
const co2Ppm = (i) => 400 + ((i * 7919 + salt * 104729) % 16000) / 4

const client = mqtt.connect(`mqtt://127.0.0.1:${port}`, {
  clientId: deviceId,
  username: deviceId,
  password: secret,
  keepalive: keepaliveS,
  reconnectPeriod: 150,
  reconnectOnConnackError: true, // refused while the store is away: it comes again
  connectTimeout: 8000,
  will: {
    topic: topic.replace(/readings$/, 'status'),
    payload: Buffer.from('offline'),
    qos: 1,
    retain: true,
  },
})
client.on('error', () => undefined)

let sent = 0
let acknowledged = []
let waiting = 0
let isStopping = false

/** @param {number} i */
function publish(i) {
  client.publish(topic, JSON.stringify({ t: baseMs + i * 1000, co2_ppm: co2Ppm(i) }), { qos: 1 }, (error) => {
    if (error) {
      setTimeout(() => publish(i), 100) // given back by the client library, as on a refused connect
      return
    }
    waiting--
    acknowledged.push(i)
  })
}

// by the clock, so that a busy machine sends later and not less
let startedMs
client.once('connect', () => (startedMs = performance.now()))
const sending = setInterval(() => {
  if (startedMs === undefined || isStopping) return
  const due = (performance.now() - startedMs) / everyMs
  while (sent < due && waiting < windowMax) {
    waiting++
    publish(sent++)
  }
}, everyMs)

setInterval(() => {
  const isDone = isStopping && waiting === 0
  process.send({ sent, acknowledged, waiting }, () => isDone && process.exit(0))
  acknowledged = []
}, 100)

process.on('message', () => {
  isStopping = true
  clearInterval(sending)
})
process.on('disconnect', () => process.exit(1))

// Load generator of the ingest benchmark: MQTT 3.1.1 over plain sockets, as little work as can be, for it shares the cores with what it measures.
import net from 'node:net'

// With `each`, every device sends that many messages and the process ends when all are acknowledged; else it measures for some seconds.
const { port, devices, window, perMessage, seconds, baseMs, each } = JSON.parse(process.argv[2])

/** @param {string} text */
const mqttText = (text) => {
  const bytes = Buffer.from(text)
  return Buffer.concat([Buffer.from([bytes.length >> 8, bytes.length & 255]), bytes])
}
/** @param {number} first @param {Buffer} body */
const packet = (first, body) => {
  const length = []
  let left = body.length
  do {
    length.push(left >= 128 ? (left % 128) | 128 : left)
    left = Math.floor(left / 128)
  } while (left > 0)
  return Buffer.concat([Buffer.from([first, ...length]), body])
}

let isOver = false
let measured = 0
let isMeasuring = false
const latenciesMs = []
let unanswered = each === undefined ? Number.POSITIVE_INFINITY : each * devices.length

/** @param {{ deviceId: string, secret: string, topic: string }} device */
function connect(device) {
  const name = mqttText(device.deviceId)
  const head = Buffer.concat([mqttText('MQTT'), Buffer.from([4, 0xc2, 0, 60])])
  const topic = mqttText(device.topic)
  const socket = net.connect({ port, host: '127.0.0.1', noDelay: true })
  socket.write(packet(0x10, Buffer.concat([head, name, name, mqttText(device.secret)])))
  let next = 0
  let left = each ?? Number.POSITIVE_INFINITY
  let id = 0
  let open = 0
  let answered = 4 // bytes of the CONNACK still to come
  const sentMs = new Float64Array(65536)
  const send = () => {
    socket.cork()
    while (open < window && left > 0 && !isOver) {
      left--
      id = (id % 65535) + 1
      sentMs[id] = performance.now()
      socket.write(
        packet(0x32, Buffer.concat([topic, Buffer.from([id >> 8, id & 255]), Buffer.from(payload())])),
      )
      open++
    }
    socket.uncork()
  }
  const reading = () => `{"t":${baseMs + next++},"co2_ppm":${420 + (next % 900)},"temp_c":21.4,"rh_pct":38}`
  const payload = () =>
    perMessage === 1 ? reading() : `[${Array.from({ length: perMessage }, reading).join(',')}]`
  let rest = Buffer.alloc(0)
  socket.on('data', (chunk) => {
    let bytes = rest.length > 0 ? Buffer.concat([rest, chunk]) : chunk
    if (answered > 0) {
      if (bytes.length < 4) {
        rest = bytes
        return
      }
      if (bytes[3] !== 0) throw new Error(`connect refused: ${bytes[3]}`)
      answered = 0
      bytes = bytes.subarray(4)
    }
    const now = performance.now()
    let at = 0
    for (; at + 4 <= bytes.length; at += 4) {
      open--
      unanswered--
      if (!isMeasuring) continue
      measured++
      if (measured % 16 === 0) latenciesMs.push(now - sentMs[(bytes[at + 2] << 8) | bytes[at + 3]])
    }
    rest = bytes.subarray(at)
    send()
    if (unanswered === 0 && !isOver) {
      isOver = true
      process.send({ phase: 'answered' }, () => process.exit(0))
    }
  })
  socket.on('close', () => isOver || process.exit(3))
}

devices.forEach(connect)
if (each !== undefined) await new Promise(() => undefined)
await new Promise((resolve) => setTimeout(resolve, 2000))
isMeasuring = true
process.send({ phase: 'measuring' })
await new Promise((resolve) => setTimeout(resolve, seconds * 1000))
isMeasuring = false
process.send({ phase: 'measured', messages: measured, latenciesMs: latenciesMs.sort((a, b) => a - b) })
isOver = true
setTimeout(() => process.exit(0), 1500)

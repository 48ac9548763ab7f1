import net from 'node:net'
import tls from 'node:tls'
import mqttPacket, {
  type IConnackPacket,
  type IPublishPacket,
  type ISubackPacket,
  type Packet,
} from 'mqtt-packet'
import { Acknowledgements, type Outcome } from './acknowledgements'
import type { BrokerAddress } from './address'
import { connackInWords, isOlderBroker, reasonInWords } from './codes'

/** A message as it came. `held`: the broker may have kept it for a while, so its arrival says nothing of its time. */
export type Incoming = { topic: string; payload: Uint8Array; retain: boolean; held: boolean }

export type ConnectionOptions = {
  address: BrokerAddress
  clientId: string
  filter: string
  version: 4 | 5
  /** publishes that the broker may send ahead of their acknowledgements (MQTT 5; an older broker has its own limit) */
  receiveMaximum: number
  /** how long the broker keeps what comes while nobody is connected; 0: not at all */
  sessionExpiryS: number
  /** a filter of earlier times that a resumed session may still hold: taken away */
  formerFilter?: string
  /** takes the subscription away instead of making it: what is queued still comes */
  drains?: boolean
  /** `settle` once: committed is acknowledged, dropped ends the connection so that the broker sends again */
  onMessage: (message: Incoming, settle: (outcome: Outcome) => void) => void
}

/** Thrown where the broker speaks only MQTT 3.1.1. */
export class OlderBroker extends Error {}

const keepAliveS = 30
const openWithinMs = 10_000
/** Larger packets are not sent by the broker (MQTT 5), or end the connection. */
const packetMaxBytes = 4 * 1024 * 1024
/** Unacknowledged payloads from which on the socket is not read any more: some ten batches, whatever the size of a message. */
const bytesMax = 4 * 1024 * 1024
/** After a resumed session, arrivals count as held for this long at least, and until half of the window has been free for as long. */
const backlogOverMs = 2000
/** A broker of MQTT 3.1.1 has a window of its own: there, until nothing comes for a moment, or for this long. */
const backlogMostMs = 60_000

/** One connection to a broker: connects, subscribes, hands on what comes, acknowledges in order. It does not come again by itself. */
export class Connection {
  /** Resolves with whether the broker still had our session, when it has granted the subscription. */
  readonly opened: Promise<boolean>
  /** Resolves with the reason when it has ended, however that came. */
  readonly closed: Promise<Error>
  readonly #options: ConnectionOptions
  readonly #socket: net.Socket
  readonly #acks: Acknowledgements
  readonly #timers: NodeJS.Timeout[] = []
  #end!: (why: Error) => void
  #open!: (sessionPresent: boolean) => void
  #sessionPresent = false
  #isHeld = false
  #isTaking = true
  #lastHeardMs = performance.now()
  #busyMs = performance.now()
  #lastPublishMs = 0

  constructor(options: ConnectionOptions) {
    this.#options = options
    this.#acks = new Acknowledgements(
      (ids) => this.#acknowledge(ids),
      () => this.close(new Error('messages were given back: the database takes none')),
    )
    const { host, port, tls: secure } = options.address
    this.#socket = secure
      ? tls.connect({ host, port, servername: net.isIP(host) ? '' : host, ca: secure.ca })
      : net.connect({ host, port })
    this.#socket.setNoDelay(true)
    let ended: Error | undefined
    this.closed = new Promise((resolve) => {
      this.#end = (why) => {
        ended ??= why
        for (const timer of this.#timers) clearInterval(timer)
        this.#socket.destroy()
        resolve(ended)
      }
    })
    this.opened = new Promise((resolve, reject) => {
      this.#open = resolve
      void this.closed.then(reject)
    })
    this.opened.catch(() => undefined)
    this.#listen(secure ? 'secureConnect' : 'connect')
  }

  /** Publishes not yet acknowledged. */
  get outstanding(): number {
    return this.#acks.outstanding
  }

  /** Reads no more; what is taken can still be acknowledged. */
  stopTaking(): void {
    this.#isTaking = false
    this.#socket.pause()
  }

  /** Sends the acknowledgements that are due, says good-bye and ends; the broker keeps the session unless it is given up (MQTT 5). */
  leave(givesUpSession = false): void {
    this.#acks.flush()
    this.#isTaking = false
    const properties = givesUpSession ? { properties: { sessionExpiryInterval: 0 } } : {}
    this.#send({ cmd: 'disconnect', reasonCode: 0, ...properties })
    this.#socket.end()
    this.#socket.resume() // to see the broker's end; what still comes is passed by
    setTimeout(() => this.#end(new Error('left')), 500).unref()
    this.#socket.once('close', () => this.#end(new Error('left')))
  }

  /** Ends at once. */
  close(why: Error): void {
    this.#end(why)
  }

  #listen(connected: 'connect' | 'secureConnect'): void {
    const parser = mqttPacket.parser({ protocolVersion: this.#options.version })
    parser.on('packet', (packet) => this.#take(packet))
    parser.on('error', (error: Error) => this.#end(new Error(`the broker sent no MQTT: ${error.message}`)))
    this.#socket.once(connected, () => this.#greet())
    this.#socket.on('data', (bytes) => {
      this.#lastHeardMs = performance.now()
      parser.parse(bytes)
      // the parser waits for the whole of a packet, however much that is
      if ((parser as unknown as { packet: { length: number } }).packet.length > packetMaxBytes)
        this.#end(new Error(`the broker sent a packet of more than ${packetMaxBytes} bytes`))
    })
    this.#socket.on('error', (error) => this.#end(error))
    this.#socket.on('close', () => this.#end(new Error('the broker closed the connection')))
    const late = setTimeout(
      () => this.#end(new Error(`the broker has not answered within ${openWithinMs / 1000} s`)),
      openWithinMs,
    )
    this.#timers.push(late)
    this.opened.then(
      () => clearTimeout(late),
      () => undefined,
    )
  }

  #send(packet: Packet): void {
    this.#socket.write(mqttPacket.generate(packet, { protocolVersion: this.#options.version }))
  }

  #greet(): void {
    const { address, clientId, version, receiveMaximum, sessionExpiryS } = this.#options
    this.#send({
      cmd: 'connect',
      protocolId: 'MQTT',
      protocolVersion: version,
      clientId,
      clean: sessionExpiryS === 0,
      keepalive: keepAliveS,
      ...(address.userName === undefined ? {} : { username: address.userName }),
      ...(address.password === undefined ? {} : { password: Buffer.from(address.password) }),
      ...(version === 5
        ? {
            properties: {
              sessionExpiryInterval: sessionExpiryS,
              receiveMaximum,
              maximumPacketSize: packetMaxBytes,
            },
          }
        : {}),
    })
  }

  #take(packet: Packet): void {
    if (packet.cmd === 'publish') this.#takePublish(packet)
    else if (packet.cmd === 'connack') this.#takeConnack(packet)
    else if (packet.cmd === 'suback') this.#takeSuback(packet)
    else if (packet.cmd === 'unsuback' && this.#options.drains) this.#open(this.#sessionPresent)
    else if (packet.cmd === 'disconnect') this.#end(new Error(reasonInWords(packet.reasonCode ?? 0x80)))
  }

  #takeConnack(packet: IConnackPacket): void {
    const code = packet.reasonCode ?? packet.returnCode ?? 0
    if (code !== 0) {
      const why = connackInWords(code)
      this.#end(isOlderBroker(code) ? new OlderBroker(why) : new Error(why))
      return
    }
    const { filter } = this.#options
    this.#sessionPresent = packet.sessionPresent
    this.#isHeld = packet.sessionPresent
    const aliveS = packet.properties?.serverKeepAlive ?? keepAliveS
    if (aliveS > 0) this.#stayAlive(aliveS * 1000)
    const sinceMs = performance.now()
    this.#timers.push(setInterval(() => this.#watchBacklog(sinceMs), 200))
    const { drains, formerFilter } = this.#options
    if (drains) this.#send({ cmd: 'unsubscribe', messageId: 1, unsubscriptions: [filter] })
    else this.#send({ cmd: 'subscribe', messageId: 1, subscriptions: [{ topic: filter, qos: 1 }] })
    // after the subscription, so that no message falls between the two
    if (formerFilter !== undefined && packet.sessionPresent)
      this.#send({ cmd: 'unsubscribe', messageId: 2, unsubscriptions: [formerFilter] })
  }

  /** Says when what the broker had kept has come, as far as can be told. */
  #watchBacklog(sinceMs: number): void {
    const { version, receiveMaximum } = this.#options
    const nowMs = performance.now()
    const isFull = this.outstanding > receiveMaximum / 2 || this.#acks.outstandingBytes > bytesMax / 2
    if (isFull) this.#busyMs = nowMs
    const isQuiet = this.outstanding === 0 && nowMs - this.#lastPublishMs > 150
    const hasRoom = version === 5 && nowMs - this.#busyMs > backlogOverMs
    const isLong = version === 4 && nowMs - sinceMs > backlogMostMs
    if (nowMs - sinceMs > backlogOverMs && (isQuiet || hasRoom || isLong)) this.#isHeld = false
  }

  #takeSuback(packet: ISubackPacket): void {
    const code = Number(packet.granted[0])
    if (code < 0x80) this.#open(this.#sessionPresent)
    else this.#end(new Error(`subscription to ${this.#options.filter} refused: ${reasonInWords(code)}`))
  }

  #stayAlive(ms: number): void {
    const look = () => {
      // what is not read cannot be heard
      if (!this.#isTaking || this.#socket.isPaused()) this.#lastHeardMs = performance.now()
      if (performance.now() - this.#lastHeardMs > ms * 1.5) this.#end(new Error('the broker is silent'))
      else this.#send({ cmd: 'pingreq' })
    }
    this.#timers.push(setInterval(look, ms / 2))
  }

  #takePublish(packet: IPublishPacket): void {
    if (!this.#isTaking) return
    this.#lastPublishMs = performance.now()
    const payload = typeof packet.payload === 'string' ? Buffer.from(packet.payload) : packet.payload
    const { topic, retain, dup, messageId } = packet
    const message = { topic, payload, retain, held: dup || retain || this.#isHeld }
    const isAsked = packet.qos > 0 && messageId !== undefined
    const settle = isAsked ? this.#acks.hold(messageId, payload.byteLength) : () => undefined
    this.#options.onMessage(message, settle)
    if (this.#acks.outstandingBytes > bytesMax) this.#socket.pause()
  }

  /** PUBACK without a reason code is success, and the same four bytes in both versions. */
  #acknowledge(ids: readonly number[]): void {
    const bytes = Buffer.allocUnsafe(ids.length * 4)
    for (const [index, id] of ids.entries()) {
      bytes.writeUInt16BE(0x4002, index * 4)
      bytes.writeUInt16BE(id, index * 4 + 2)
    }
    if (this.#socket.writable) this.#socket.write(bytes)
    if (this.#isTaking && this.#socket.isPaused() && this.#acks.outstandingBytes < bytesMax / 2)
      this.#socket.resume()
  }
}

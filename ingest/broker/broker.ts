import net from 'node:net'
import {
  Aedes,
  type AedesPublishPacket,
  type AuthenticateError,
  type Client,
  type PublishPacket,
} from 'aedes'
import type { Logger } from 'pino'
import type { Credentials } from '../worker/credentials'
import type { Ingest } from '../worker/ingest'
import { sourceOf, takePublish } from '../worker/take'
import { guardConnection, writtenTopic } from './guard'
import { LIMITS } from './limits'
import { Session } from './session'
import { SignIn } from './sign-in'
import { Throttle } from './throttle'

export type BrokerOptions = {
  host: string
  port: number
  ingest: Ingest
  credentials: Credentials
  log: Logger
  nowMs: () => number
  /** readings a second that one device may send in the long run */
  readingsPerS: number
}

type Done = (error?: Error | null) => void

/** The broker library with publishes that go to the ingest and are acknowledged when they are committed. */
export class Broker {
  readonly #options: BrokerOptions
  readonly #sessions = new WeakMap<Client, Session>()
  readonly #open = new Set<Session>()
  readonly #kept = new WeakSet<object>()
  readonly #throttle: Throttle
  readonly #signIn: SignIn
  readonly #server: net.Server
  #aedes!: Aedes
  #stopping = false

  constructor(options: BrokerOptions) {
    this.#options = options
    this.#throttle = new Throttle({
      ratePerS: options.readingsPerS,
      burst: options.readingsPerS * LIMITS.burstSeconds,
    })
    this.#signIn = new SignIn(options)
    this.#server = net.createServer({
      noDelay: true,
      keepAlive: true,
      keepAliveInitialDelay: LIMITS.tcpKeepAliveMs,
    })
    this.#server.maxConnections = LIMITS.connections
  }

  get connections(): number {
    return this.#open.size
  }

  /** Starts to listen; rejects where the port is taken. */
  async start(): Promise<void> {
    this.#aedes = await Aedes.createBroker({
      connectTimeout: LIMITS.connectTimeoutMs,
      preConnect: (client, packet, done) => {
        const version: number | undefined = packet.protocolVersion
        if (version !== 4 && version !== 3)
          this.#signIn.noteStranger(
            client,
            'unsupported-protocol',
            `protocol version ${version}: expected 4 (MQTT 3.1.1)`,
          )
        done(null, true)
      },
      authenticate: (client, userName, secret, done) =>
        void this.#authenticate(client, userName, secret, done),
      authorizePublish: (client, packet, done) => this.#publish(client, packet, done),
      authorizeSubscribe: (client, subscription, done) => {
        this.#note(client, 'subscribe-refused', `filter ${JSON.stringify(subscription.topic.slice(0, 120))}`)
        done(null, null)
      },
    })
    this.#aedes.on('clientDisconnect', (client) => this.#forget(client))
    this.#aedes.on('clientError', (client) => this.#forget(client))
    this.#forwardOnlyKept()
    this.#server.on('connection', (socket) => this.#accept(socket))
    await new Promise<void>((resolve, reject) => {
      this.#server.once('error', reject)
      this.#server.listen(
        { host: this.#options.host, port: this.#options.port, backlog: LIMITS.backlog },
        resolve,
      )
    })
  }

  /** Looks again at every connected device; closes those retired, removed, or with another secret. */
  async recheck(): Promise<void> {
    const sessions = [...this.#open]
    if (sessions.length === 0) return
    const devices = await this.#options.credentials.read(sessions.map((session) => session.device.userName))
    for (const session of sessions) {
      const now = devices.get(session.device.userName.toLowerCase())
      if (now && !now.retired && now.secretSha256 === session.device.secretSha256) session.device = now
      else session.close()
    }
  }

  /** First stage of a stop: takes no connection and no publish any more. What is taken is still acknowledged. */
  refuseNew(): void {
    this.#stopping = true
    this.#server.close()
  }

  /** Second stage: closes every connection. */
  async stop(): Promise<void> {
    for (const session of this.#open) session.end()
    await new Promise<void>((resolve) => this.#aedes.close(() => resolve()))
  }

  #accept(socket: net.Socket): void {
    const client = this.#aedes.handle(socket)
    guardConnection(client, {
      onOversize: (bytes) =>
        this.#noteAny(client, 'too-large', `a packet of ${bytes} bytes; the connection was closed`),
      onBrokenBytes: (error) => this.#noteAny(client, 'protocol-error', error.message),
    })
  }

  /** Readings need no way through the broker once they are stored; only a status is kept and passed on. */
  #forwardOnlyKept(): void {
    type Publish = (packet: PublishPacket, client: Client | Done | null, done?: Done) => void
    const forward = this.#aedes.publish.bind(this.#aedes) as Publish
    const publish: Publish = (packet, client, done) => {
      if (client && typeof client !== 'function' && !this.#kept.has(packet)) done?.(null)
      else forward(packet, client, done)
    }
    this.#aedes.publish = publish as Aedes['publish']
  }

  async #authenticate(
    client: Client,
    userName: string | undefined,
    secret: Buffer | undefined,
    done: (error: AuthenticateError | null, success: boolean | null) => void,
  ): Promise<void> {
    const found = this.#stopping
      ? (Object.assign(new Error('stopping'), { returnCode: 3 }) as AuthenticateError)
      : await this.#signIn.check(client, userName, secret)
    if (found instanceof Error) {
      done(found, false)
      return
    }
    if (client.closed) return
    const session = new Session(client, found)
    this.#sessions.set(client, session)
    this.#open.add(session)
    client.conn.once('close', () => this.#forget(client))
    done(null, true)
  }

  #forget(client: Client): void {
    const session = this.#sessions.get(client)
    if (!session) return
    session.end()
    this.#open.delete(session)
  }

  #publish(client: Client | null, packet: PublishPacket, done: Done): void {
    const session = client ? this.#sessions.get(client) : undefined
    if (!session) {
      done(new Error('not a signed-in device'))
      return
    }
    const isWill = packet.cmd !== 'publish'
    if (isWill) this.#takeWill(session, packet, done)
    else if (!this.#stopping) this.#takeMessage(session, packet, done)
  }

  #takeMessage(session: Session, packet: PublishPacket, done: Done): void {
    const { ingest, nowMs } = this.#options
    const taken = takePublish(session.device, writtenTopic(packet), bytesOf(packet), nowMs())
    if (taken.retain) this.#kept.add(packet)
    const settle = (outcome: 'committed' | 'dropped') => {
      if (outcome === 'committed') done(null)
      else session.close()
    }
    const cost = Math.max(1, taken.readings.length + taken.supply.length + taken.refusals.length)
    const delayMs = this.#throttle.delayMs(session.device.userName.toLowerCase(), cost, nowMs())
    if (delayMs > 0) {
      const detail = `more than ${this.#options.readingsPerS} readings a second in the long run`
      ingest.note({ ...taken.from, reason: 'throttled', detail, sample: null, receivedMs: nowMs() })
    }
    session.inTurn(delayMs, () => ingest.submit({ ...taken, settle }))
  }

  /** A last will may only be the device's own status; while the store is away, connections end for that reason and wills say nothing. */
  #takeWill(session: Session, packet: PublishPacket, done: Done): void {
    const { ingest, nowMs } = this.#options
    if (this.#stopping || !ingest.isOpen) {
      done(new Error('last wills are not heard now'))
      return
    }
    const taken = takePublish(session.device, packet.topic, bytesOf(packet), nowMs())
    if (taken.retain) {
      packet.retain = true
      this.#kept.add(packet)
      done(null)
      return
    }
    if (taken.refusals.length === 0)
      this.#noteSession(session, 'wrong-topic', 'a last will may only be the status')
    for (const refusal of taken.refusals) ingest.note(refusal)
    done(new Error('refused'))
  }

  #note(client: Client, reason: 'subscribe-refused' | 'too-large' | 'protocol-error', detail: string): void {
    const session = this.#sessions.get(client)
    if (session) this.#noteSession(session, reason, detail)
  }

  #noteSession(
    session: Session,
    reason: 'subscribe-refused' | 'too-large' | 'protocol-error' | 'wrong-topic',
    detail: string,
  ): void {
    const receivedMs = this.#options.nowMs()
    this.#options.ingest.note({ ...sourceOf(session.device), reason, detail, sample: null, receivedMs })
  }

  #noteAny(client: Client, reason: 'too-large' | 'protocol-error', detail: string): void {
    if (this.#sessions.has(client)) this.#note(client, reason, detail)
    else this.#signIn.noteStranger(client, reason, detail)
  }
}

function bytesOf(packet: PublishPacket | AedesPublishPacket): Uint8Array {
  return typeof packet.payload === 'string' ? Buffer.from(packet.payload) : packet.payload
}

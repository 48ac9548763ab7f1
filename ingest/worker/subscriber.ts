import type { Outcome } from '@/lib/server/mqtt/acknowledgements'
import { Connection, type ConnectionOptions, OlderBroker } from '@/lib/server/mqtt/connection'
import { pause, retryDelayMs } from './pause'

export type SubscriberOptions = Omit<ConnectionOptions, 'version' | 'onMessage'> & {
  onMessage: (
    message: Parameters<ConnectionOptions['onMessage']>[0],
    settle: (outcome: Outcome) => void,
  ) => void
  /** an older broker is spoken to in MQTT 3.1.1; a shared subscription needs MQTT 5 */
  acceptsOlder: boolean
  /** connects only while it answers true (the database takes rows) */
  isReady: () => boolean
  random: () => number
  onState?: (state: SubscriberState) => void
}

export type SubscriberState = { connected: true; resumed: boolean } | { connected: false; why: string }

/** A connection that comes again by itself, with growing pauses, to the session that the broker has kept. */
export class Subscriber {
  readonly #options: SubscriberOptions
  #connection: Connection | undefined
  #version: 4 | 5 = 5
  #isStopped = false
  #running: Promise<void> = Promise.resolve()
  #isOpen = false

  constructor(options: SubscriberOptions) {
    this.#options = options
  }

  get isConnected(): boolean {
    return this.#isOpen
  }

  /** Publishes taken and not yet acknowledged. */
  get outstanding(): number {
    return this.#connection?.outstanding ?? 0
  }

  start(): void {
    this.#running = this.#run()
  }

  /** First stage of a stop: takes nothing more; what is taken can still be acknowledged. */
  stopTaking(): void {
    this.#isStopped = true
    this.#connection?.stopTaking()
  }

  /** Second stage: acknowledges what is settled and leaves; the broker keeps the session. */
  async stop(): Promise<void> {
    this.stopTaking()
    if (this.#isOpen) this.#connection?.leave()
    else this.#connection?.close(new Error('left'))
    await this.#running
  }

  async #run(): Promise<void> {
    for (let tries = 0; !this.#isStopped; tries++) {
      if (!this.#options.isReady()) {
        await pause(100)
        continue
      }
      const openedMs = await this.#connectOnce()
      if (openedMs > 5000) tries = 0
      for (
        let waited = retryDelayMs(tries, 200, 10_000, this.#options.random);
        waited > 0 && !this.#isStopped;
      )
        await pause(Math.min(waited, 100)).then(() => (waited -= 100))
    }
  }

  /** Milliseconds for which it was connected. */
  async #connectOnce(): Promise<number> {
    const connection = new Connection({ ...this.#options, version: this.#version })
    this.#connection = connection
    let openedMs = Number.NaN
    connection.opened.then(
      (resumed) => {
        openedMs = performance.now()
        this.#isOpen = true
        this.#options.onState?.({ connected: true, resumed })
      },
      () => undefined,
    )
    const why = await connection.closed
    this.#isOpen = false
    if (why instanceof OlderBroker && this.#options.acceptsOlder && this.#version === 5) this.#version = 4
    else if (!this.#isStopped) this.#options.onState?.({ connected: false, why: why.message })
    return Number.isNaN(openedMs) ? 0 : performance.now() - openedMs
  }
}

import pg from 'pg'

export type ListenerEvents = {
  onMessage: (payload: string | undefined) => void
  /** `again` is true for every time but the first */
  onListening: (again: boolean) => void
  onLost: (error: Error, waitMs: number) => void
}

const FIRST_WAIT_MS = 250
const LONGEST_WAIT_MS = 30_000
const PING_EVERY_MS = 20_000
const PING_WITHIN_MS = 10_000

/** Wait before the nth try again: doubles up to 30 s, spread by half, so that many processes do not come back at once. */
export function waitBeforeTry(failures: number, random: () => number): number {
  const full = Math.min(LONGEST_WAIT_MS, FIRST_WAIT_MS * 2 ** Math.max(0, failures - 1))
  return Math.round(full * (0.5 + random() / 2))
}

/**
 * One dedicated connection that listens on a channel, for good: when it breaks, or stops answering, it comes back after a growing,
 * spread wait, which starts over once it succeeds.
 */
export class Listener {
  listening = false
  private client: pg.Client | null = null
  private failures = 0
  private once = false
  private started = false
  private closed = false
  private timer: NodeJS.Timeout | null = null
  private ping: NodeJS.Timeout | null = null

  constructor(
    private readonly url: string,
    private readonly channel: string,
    private readonly events: ListenerEvents,
  ) {}

  /** Begins to listen; calling it again does nothing. */
  start(): void {
    if (this.started || this.closed) return
    this.started = true
    void this.connect()
  }

  async close(): Promise<void> {
    this.closed = true
    if (this.timer) clearTimeout(this.timer)
    if (this.ping) clearInterval(this.ping)
    const client = this.client
    this.client = null
    await client?.end().catch(() => undefined)
  }

  private async connect(): Promise<void> {
    const client = new pg.Client({
      connectionString: this.url,
      application_name: 'ebbmark live',
      connectionTimeoutMillis: 5000,
      keepAlive: true,
    })
    this.client = client
    client.on('notification', ({ payload }) => this.events.onMessage(payload))
    client.on('error', (error) => this.lost(client, error))
    client.on('end', () => this.lost(client, new Error('The connection ended.')))
    try {
      await client.connect()
      await client.query(`LISTEN ${this.channel}`)
      if (this.client !== client) return
      this.listening = true
      this.failures = 0
      this.ping = setInterval(() => this.askAlive(client), PING_EVERY_MS)
      this.ping.unref()
      this.events.onListening(this.once)
      this.once = true
    } catch (error) {
      this.lost(client, error as Error)
    }
  }

  /** A peer that vanished without a word is noticed by its silence. */
  private askAlive(client: pg.Client): void {
    const late = setTimeout(
      () => this.lost(client, new Error('The connection does not answer.')),
      PING_WITHIN_MS,
    )
    late.unref()
    client.query('SELECT 1').then(
      () => clearTimeout(late),
      (error: Error) => {
        clearTimeout(late)
        this.lost(client, error)
      },
    )
  }

  private lost(client: pg.Client, error: Error): void {
    if (this.client !== client || this.closed) return
    this.client = null
    this.listening = false
    if (this.ping) clearInterval(this.ping)
    client.end().catch(() => undefined)
    this.failures += 1
    const waitMs = waitBeforeTry(this.failures, Math.random)
    this.events.onLost(error, waitMs)
    this.timer = setTimeout(() => void this.connect(), waitMs)
  }
}

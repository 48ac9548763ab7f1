import type { Client } from 'aedes'
import type { Device } from '@/db/queries/devices'

/** A message that must wait for its device's rate. */
type Delayed = { dueMs: number; release: () => void }

/** One signed-in connection: whose it is, and what must wait for its rate. */
export class Session {
  device: Device
  #delayed: Delayed[] = []
  #timer: NodeJS.Timeout | undefined
  readonly #client: Client

  constructor(client: Client, device: Device) {
    this.#client = client
    this.device = device
  }

  /** Runs `release` after `delayMs`, and never before an earlier message of this connection. */
  inTurn(delayMs: number, release: () => void): void {
    if (delayMs <= 0 && this.#delayed.length === 0) {
      release()
      return
    }
    const dueMs = Math.max(performance.now() + delayMs, this.#delayed.at(-1)?.dueMs ?? 0)
    this.#delayed.push({ dueMs, release })
    this.#timer ??= setTimeout(() => this.#releaseDue(), delayMs)
  }

  /** Ends the connection; what is unanswered stays so, and the device sends it again. */
  close(): void {
    this.end()
    this.#client.conn.destroy()
  }

  /** Forgets what waits: the connection is gone. */
  end(): void {
    clearTimeout(this.#timer)
    this.#delayed = []
  }

  #releaseDue(): void {
    this.#timer = undefined
    const nowMs = performance.now()
    let due = 0
    while (due < this.#delayed.length && this.#delayed[due]!.dueMs <= nowMs + 1) due++
    const released = this.#delayed.splice(0, due)
    const next = this.#delayed[0]
    if (next) this.#timer = setTimeout(() => this.#releaseDue(), Math.max(1, next.dueMs - nowMs))
    for (const { release } of released) release()
  }
}

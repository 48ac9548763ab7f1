/** What became of a message: in the database, or given back because the database is away (its sender sends it again). */
export type Outcome = 'committed' | 'dropped'

/** A publish that waits for its acknowledgement. */
type Held = { id: number; bytes: number; settled: boolean }

/**
 * Puts acknowledgements into the order in which the publishes came (MQTT 5 §4.6, 3.1.1 §4.6), whatever the order in which they settle;
 * many that settle together leave as one piece.
 */
export class Acknowledgements {
  #held: Held[] = []
  #first = 0
  #isDue = false
  #bytes = 0
  readonly #send: (ids: readonly number[]) => void
  readonly #onGivenBack: () => void

  /** `send`: acknowledges these packet ids now. `onGivenBack`: one was not stored; nothing later may be acknowledged. */
  constructor(send: (ids: readonly number[]) => void, onGivenBack: () => void) {
    this.#send = send
    this.#onGivenBack = onGivenBack
  }

  /** Publishes not yet acknowledged. */
  get outstanding(): number {
    return this.#held.length - this.#first
  }

  /** Bytes of their payloads. */
  get outstandingBytes(): number {
    return this.#bytes
  }

  /** Takes a publish; the answer is to be called once with what became of it. */
  hold(id: number, bytes: number): (outcome: Outcome) => void {
    const held: Held = { id, bytes, settled: false }
    this.#held.push(held)
    this.#bytes += bytes
    return (outcome) => {
      if (outcome === 'dropped') {
        this.#onGivenBack()
        return
      }
      held.settled = true
      if (this.#isDue) return
      this.#isDue = true
      setImmediate(() => this.flush())
    }
  }

  /** Sends what is settled and not behind something unsettled. */
  flush(): void {
    this.#isDue = false
    const ids: number[] = []
    while (this.#held[this.#first]?.settled) {
      const held = this.#held[this.#first++]!
      ids.push(held.id)
      this.#bytes -= held.bytes
    }
    if (this.#first * 2 > this.#held.length) {
      this.#held = this.#held.slice(this.#first)
      this.#first = 0
    }
    if (ids.length > 0) this.#send(ids)
  }
}

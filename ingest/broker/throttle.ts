/** Bucket of one device: tokens may go below nought, then they are owed. */
type Bucket = { tokens: number; atMs: number }

/** Buckets held before full ones are forgotten. */
const BUCKETS_MAX = 10_000

/**
 * How long a device's message must wait so that the device keeps to its rate: nothing while its burst lasts, then as long as what it
 * owes takes to earn. Nothing is dropped. Kept per device, so that a new connection does not start afresh.
 */
export class Throttle {
  #buckets = new Map<string, Bucket>()
  readonly #ratePerS: number
  readonly #burst: number

  constructor(options: { ratePerS: number; burst: number }) {
    this.#ratePerS = options.ratePerS
    this.#burst = options.burst
  }

  /** Milliseconds that a message of `cost` readings arriving at `nowMs` (epoch milliseconds) must wait. */
  delayMs(key: string, cost: number, nowMs: number): number {
    const bucket = this.#buckets.get(key) ?? { tokens: this.#burst, atMs: nowMs }
    const earned = (Math.max(0, nowMs - bucket.atMs) / 1000) * this.#ratePerS
    bucket.tokens = Math.min(this.#burst, bucket.tokens + earned) - cost
    bucket.atMs = nowMs
    this.#buckets.set(key, bucket)
    if (this.#buckets.size > BUCKETS_MAX) this.#forgetFull(nowMs)
    return bucket.tokens >= 0 ? 0 : (-bucket.tokens / this.#ratePerS) * 1000
  }

  #forgetFull(nowMs: number): void {
    const fullAfterMs = (this.#burst / this.#ratePerS) * 1000
    for (const [key, bucket] of this.#buckets)
      if (nowMs - bucket.atMs > fullAfterMs) this.#buckets.delete(key)
  }
}

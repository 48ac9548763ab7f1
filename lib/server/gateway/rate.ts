/** What one key may ask of one process: so many requests in the long run, and so many at once after a pause. */
export const KEY_RATE = { requestsPerS: 10, burst: 60 } as const

const BUCKETS_MAX = 10_000
const buckets = new Map<number, { tokens: number; atMs: number }>()

/** Takes one request of a key; 0, or the whole seconds after which the next will be taken. */
export function secondsUntilNext(keyId: number, nowMs: number): number {
  const bucket = buckets.get(keyId) ?? { tokens: KEY_RATE.burst, atMs: nowMs }
  const earned = (Math.max(0, nowMs - bucket.atMs) / 1000) * KEY_RATE.requestsPerS
  const tokens = Math.min(KEY_RATE.burst, bucket.tokens + earned)
  const isTaken = tokens >= 1
  if (buckets.size >= BUCKETS_MAX) buckets.clear()
  buckets.set(keyId, { tokens: isTaken ? tokens - 1 : tokens, atMs: nowMs })
  return isTaken ? 0 : Math.max(1, Math.ceil((1 - tokens) / KEY_RATE.requestsPerS))
}

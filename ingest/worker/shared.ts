/** What the ingest workers of one deployment have in common at an outside broker. */

/** Everything that devices publish. */
export const PLAIN_FILTER = 'ebbmark/v1/+/+/+'

/** One subscription that all workers share: the broker gives each message to one of them (MQTT 5 §4.8.2). */
export const SHARED_FILTER = `$share/ebbmark/${PLAIN_FILTER}`

/**
 * The filter of each of so many workers, and the other one, which a session from before may still hold. A lone worker shares with nobody:
 * Mosquitto 2.0 forgets at its restart who shares a subscription, and keeps nothing for them until they are back; a plain one it remembers.
 */
export function filtersFor(workers: number): { filter: string; formerFilter: string } {
  return workers === 1
    ? { filter: PLAIN_FILTER, formerFilter: SHARED_FILTER }
    : { filter: SHARED_FILTER, formerFilter: PLAIN_FILTER }
}

/** Publishes that the broker sends ahead of their acknowledgements: two batches, so that one travels while one is committed. */
export const RECEIVE_MAXIMUM = 10_000

/** How long the broker keeps a worker's queue while the worker is away. */
export const SESSION_EXPIRY_S = 7 * 86_400

/** The client id of worker `number` (from 1): the same after every start, so that it comes back to its own queue. */
export function workerClientId(prefix: string, number: number): string {
  return `${prefix}-worker-${number}`
}

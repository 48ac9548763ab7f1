import type pg from 'pg'
import { ensureReadingsMonths, type ReadingRow, storeReadings } from '@/db/changes/readings'
import { addRefusals, type RefusalRow } from '@/db/changes/refusals'
import { type SupplyStateRow, storeSupplyStates } from '@/db/changes/supply-states'
import type { Database } from '@/db/client'
import { faultOf, type StoreFault } from './faults'
import type { Message, Refusal } from './messages'
import { RefusalBook } from './refusal-book'

/** What one transaction did. */
export type Stored = { readings: number; supply: number; refusals: number; buildings: Set<number> }

/** Set by who no longer waits for the attempt: it must not start another statement. */
export type Attempt = { abandoned: boolean }

/** Thrown where the store is away, full or busy: the messages are good and can be sent again. */
export class StoreAway extends Error {
  constructor(cause: Error) {
    super(`the database did not take the batch: ${cause.message}`, { cause })
  }
}

/**
 * Commits messages with all their refusals in one transaction, and `noted` refusals with them. Missing months are made; where PostgreSQL
 * refuses the data itself, the batch is halved until the message at fault stands alone and is recorded as cannot-be-stored.
 * Throws StoreAway for everything else.
 */
export async function storeMessages(
  database: Database,
  messages: readonly Message[],
  noted: readonly RefusalRow[],
  attempt: Attempt,
): Promise<Stored> {
  const first = await tryOnce(database, messages, noted, attempt)
  if (!('kind' in first)) return first
  if (first.kind === 'retry') throw new StoreAway(first.error)
  if (first.kind === 'missing-month') {
    await makeMonths(database, messages)
    const second = await tryOnce(database, messages, noted, attempt)
    if (!('kind' in second)) return second
    if (second.kind !== 'final') throw new StoreAway(second.error)
    return storeApart(database, messages, noted, attempt, second.error)
  }
  return storeApart(database, messages, noted, attempt, first.error)
}

async function makeMonths(database: Database, messages: readonly Message[]): Promise<void> {
  const instants = messages.flatMap((message) => message.readings.map((row) => row.atMs))
  try {
    await database.asSystemRaw('ingest', (client) => ensureReadingsMonths(client, instants))
  } catch (error) {
    throw new StoreAway(error as Error)
  }
}

/** Halves what PostgreSQL refuses; a single message that it refuses becomes a refusal itself. */
async function storeApart(
  database: Database,
  messages: readonly Message[],
  noted: readonly RefusalRow[],
  attempt: Attempt,
  error: Error,
): Promise<Stored> {
  const [only] = messages
  if (only === undefined) throw new StoreAway(error)
  if (messages.length === 1) {
    const refused = {
      ...only,
      readings: [],
      supply: [],
      refusals: [...only.refusals, unstorable(only, error)],
    }
    const last = await tryOnce(database, [refused], noted, attempt)
    if ('kind' in last) throw new StoreAway(last.error)
    return last
  }
  const middle = messages.length >> 1
  const one = await storeMessages(database, messages.slice(0, middle), noted, attempt)
  const two = await storeMessages(database, messages.slice(middle), [], attempt)
  return {
    readings: one.readings + two.readings,
    supply: one.supply + two.supply,
    refusals: one.refusals + two.refusals,
    buildings: new Set([...one.buildings, ...two.buildings]),
  }
}

function unstorable(message: Message, error: Error): Refusal {
  const receivedMs = message.readings[0]?.receivedMs ?? message.supply[0]?.receivedMs ?? 0
  const sample = JSON.stringify(message.readings[0] ?? message.supply[0] ?? null)
  return { ...message.from, reason: 'cannot-be-stored', detail: error.message, sample, receivedMs }
}

async function tryOnce(
  database: Database,
  messages: readonly Message[],
  noted: readonly RefusalRow[],
  attempt: Attempt,
): Promise<Stored | StoreFault> {
  try {
    return await database.asSystemRaw('ingest', (client) => storeIn(client, messages, noted, attempt))
  } catch (error) {
    return faultOf(error)
  }
}

// an acknowledgement promises that the row outlives a crash, whatever the server's default is
const promiseDurability = `SELECT set_config('synchronous_commit', 'on', true) WHERE current_setting('synchronous_commit') = 'off'`

async function storeIn(
  client: pg.ClientBase,
  messages: readonly Message[],
  noted: readonly RefusalRow[],
  attempt: Attempt,
): Promise<Stored> {
  const goOn = () => {
    if (attempt.abandoned) throw new Error('nobody waits for this batch any more')
  }
  goOn()
  await client.query(promiseDurability)
  const book = new RefusalBook()
  book.putBack(noted)
  for (const message of messages) for (const refusal of message.refusals) book.add(refusal)
  const readings = messages.flatMap((message) => message.readings)
  const stored = await storeReadings(client, readings)
  goOn()
  const states = await storeSupplyStates(
    client,
    messages.flatMap((message) => message.supply),
  )
  const conflicts = new Set<ReadingRow | SupplyStateRow>([...stored.conflicts, ...states.conflicts])
  if (conflicts.size > 0) for (const message of messages) noteConflicts(message, conflicts, book)
  goOn()
  const refusals = book.take()
  await addRefusals(client, refusals)
  goOn()
  return {
    readings: stored.inserted,
    supply: states.inserted,
    refusals: refusals.reduce((sum, row) => sum + row.count, 0),
    buildings: new Set(messages.flatMap((message) => buildingsOf(message))),
  }
}

function buildingsOf(message: Message): number[] {
  const first = message.readings[0] ?? message.supply[0]
  return first ? [first.buildingId] : []
}

function noteConflicts(
  message: Message,
  conflicts: ReadonlySet<ReadingRow | SupplyStateRow>,
  book: RefusalBook,
): void {
  for (const row of [...message.readings, ...message.supply]) {
    if (!conflicts.has(row)) continue
    const value = 'state' in row ? `state ${row.state}` : `co2_ppm ${row.co2Ppm}`
    book.add({
      ...message.from,
      reason: 'conflicts-with-stored',
      detail: `${value} at ${new Date(row.atMs).toISOString()}: another value is stored for this instant and stays`,
      sample: JSON.stringify(row),
      receivedMs: row.receivedMs,
    })
  }
}

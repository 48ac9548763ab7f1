import type { Logger } from 'pino'
import type { Database } from '@/db/client'
import { createLiveNotifier } from './live'
import { type Message, type Refusal, weightOf } from './messages'
import { pause, retryDelayMs, within } from './pause'
import { RefusalBook } from './refusal-book'
import { StoreAway, type Stored, storeMessages } from './store'

export type IngestOptions = {
  database: Database
  log: Logger
  /** epoch milliseconds */
  nowMs: () => number
  random: () => number
  /** writes something small and commits it: asked until it succeeds while the store is away */
  probe: () => Promise<void>
  /** readings and refusals of one transaction, about */
  batchRows?: number
  /** how long the first message of a batch waits for company */
  lingerMs?: number
  /** a batch that is not committed by then is given back */
  deadlineMs?: number
  /** readings and refusals that wait at most; more are given back at once */
  queueRowsMax?: number
}

/** Sums since the start, for the heartbeat and the log. */
export type IngestCounters = {
  messages: number
  readings: number
  supply: number
  refusals: number
  batches: number
  droppedMessages: number
  queuedRows: number
  lastCommitMs: number | null
  lastBatchTookMs: number | null
  /** rows of the last batch, and the time that all batches took: with `batches` and `readings` their means */
  lastBatchRows: number | null
  commitMs: number
  storeAway: boolean
}

/**
 * From messages to committed rows. One batch is in flight, so messages settle in the order of their arrival. A batch that cannot commit
 * within the deadline is given back with all that waits (their devices send again), and nothing is taken until the store takes rows.
 */
export class Ingest {
  readonly counters: IngestCounters = {
    messages: 0,
    readings: 0,
    supply: 0,
    refusals: 0,
    batches: 0,
    droppedMessages: 0,
    queuedRows: 0,
    lastCommitMs: null,
    lastBatchTookMs: null,
    lastBatchRows: null,
    commitMs: 0,
    storeAway: false,
  }
  readonly #options: Required<IngestOptions>
  readonly #live
  readonly #noted = new RefusalBook()
  #queue: Message[] = []
  #timer: NodeJS.Timeout | undefined
  #dueMs = 0
  #running: Promise<void> | undefined
  #stopped = false

  constructor(options: IngestOptions) {
    this.#options = { batchRows: 5000, lingerMs: 5, deadlineMs: 5000, queueRowsMax: 500_000, ...options }
    this.#live = createLiveNotifier(options.database)
  }

  /** False while the store is away or the process stops: devices are told to come again. */
  get isOpen(): boolean {
    return !this.counters.storeAway && !this.#stopped
  }

  /** Takes a message; it settles when it is committed, or given back. */
  submit(message: Message): void {
    this.counters.messages++
    if (!this.isOpen || this.counters.queuedRows >= this.#options.queueRowsMax) {
      this.counters.droppedMessages++
      message.settle('dropped')
      return
    }
    this.#queue.push(message)
    this.counters.queuedRows += weightOf(message)
    this.#wake(this.#options.lingerMs)
  }

  /** Records a refusal that nobody waits for (a failed connect, a throttled sensor) with the next batch, or within a second. */
  note(refusal: Refusal): void {
    this.#noted.add(refusal)
    this.#wake(1000)
  }

  /** Takes no more, commits what waits (for `graceMs` at most), and gives back what is left. */
  async stop(graceMs: number): Promise<void> {
    this.#stopped = true
    clearTimeout(this.#timer)
    await within(this.#run(), graceMs)
    this.#giveBack(this.#queue.splice(0))
    this.#live.stop()
  }

  /** Runs the next batch after a time, at once when enough waits; an earlier appointment stands. */
  #wake(afterMs: number): void {
    if (this.#running || !this.isOpen) return
    const waitMs = this.counters.queuedRows >= this.#options.batchRows ? 0 : afterMs
    const dueMs = performance.now() + waitMs
    if (this.#timer && this.#dueMs <= dueMs) return
    clearTimeout(this.#timer)
    this.#dueMs = dueMs
    this.#timer = setTimeout(() => void this.#run(), waitMs)
  }

  #run(): Promise<void> {
    this.#running ??= this.#commitAll().finally(() => {
      this.#running = undefined
      if (this.#queue.length > 0) this.#wake(0)
      else if (this.#noted.size > 0) this.#wake(1000)
    })
    return this.#running
  }

  async #commitAll(): Promise<void> {
    clearTimeout(this.#timer)
    this.#timer = undefined
    while (this.#queue.length > 0 || this.#noted.size > 0) {
      const batch = this.#takeBatch()
      const noted = this.#noted.take()
      const stored = await this.#commit(batch, noted)
      if (!stored) {
        this.#noted.putBack(noted)
        this.#closeStore(batch)
        return
      }
      this.#count(stored, batch)
      for (const message of batch) message.settle('committed')
      this.#live.touch(stored.buildings)
    }
  }

  #takeBatch(): Message[] {
    let rows = 0
    let length = 0
    while (length < this.#queue.length && rows < this.#options.batchRows)
      rows += weightOf(this.#queue[length++]!)
    this.counters.queuedRows -= rows
    return this.#queue.splice(0, length)
  }

  /** Tries until the deadline; undefined when the store did not take the batch. */
  async #commit(batch: Message[], noted: ReturnType<RefusalBook['take']>): Promise<Stored | undefined> {
    const startedMs = performance.now()
    const leftMs = () => this.#options.deadlineMs - (performance.now() - startedMs)
    for (let tries = 0; leftMs() > 0; tries++) {
      const attempt = { abandoned: false }
      try {
        const stored = await within(storeMessages(this.#options.database, batch, noted, attempt), leftMs())
        if (stored) {
          const tookMs = Math.round(performance.now() - startedMs)
          this.counters.lastBatchTookMs = tookMs
          this.counters.commitMs += tookMs
          return stored
        }
        this.#options.log.warn('the database has not answered in time')
      } catch (error) {
        if (!(error instanceof StoreAway)) throw error
        this.#options.log.warn({ err: error.message, tries }, 'a batch was not committed; trying again')
        await pause(Math.min(Math.max(leftMs(), 0), retryDelayMs(tries, 50, 1000, this.#options.random)))
      } finally {
        attempt.abandoned = true
      }
    }
    return undefined
  }

  #count(stored: Stored, batch: readonly Message[]): void {
    this.counters.batches += batch.length > 0 ? 1 : 0
    this.counters.lastBatchRows = batch.reduce((sum, message) => sum + weightOf(message), 0)
    this.counters.readings += stored.readings
    this.counters.supply += stored.supply
    this.counters.refusals += stored.refusals
    this.counters.lastCommitMs = this.#options.nowMs()
  }

  #giveBack(messages: Message[]): void {
    for (const message of messages) {
      this.counters.droppedMessages++
      message.settle('dropped')
    }
    this.counters.queuedRows = 0
  }

  #closeStore(batch: Message[]): void {
    this.counters.storeAway = true
    const held = [...batch, ...this.#queue.splice(0)]
    this.#options.log.error(
      { messages: held.length },
      'the database takes no readings: messages given back unacknowledged, connects refused until it is back',
    )
    this.#giveBack(held)
    if (!this.#stopped) void this.#waitForStore()
  }

  /** Asks with growing pauses until something is written again. */
  async #waitForStore(): Promise<void> {
    for (let tries = 0; !this.#stopped; tries++) {
      await pause(retryDelayMs(tries, 100, 3000, this.#options.random))
      const back = await within(
        this.#options.probe().then(
          () => true,
          () => false,
        ),
        3000,
      )
      if (!back) continue
      this.counters.storeAway = false
      this.#options.log.info('the database takes readings again')
      if (this.#noted.size > 0) this.#wake(1000)
      return
    }
  }
}

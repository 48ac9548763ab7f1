import type { Logger } from 'pino'
import { addFeedProgress, type FeedProgress, releaseFeeds } from '@/db/changes/feeds'
import type { Database } from '@/db/client'
import { leaseFeeds } from '@/db/queries/feeds'
import { type FeedParts, RunningFeed } from './feed'

/** A runner that says nothing for this long loses its feeds to another. */
const LEASE_S = 60
const reconcileMs = 15_000
const progressMs = 2000

export type FeedRunnerOptions = FeedParts & { database: Database; log: Logger; id: string }

/** Keeps the enabled feeds of the deployment running: starts, restarts and stops them as the table says, and writes their counts. */
export class FeedRunner {
  readonly #options: FeedRunnerOptions
  #running = new Map<number, RunningFeed>()
  #unwritten: FeedProgress[] = []
  #isBusy = false
  #isAgain = false
  #isStopped = false
  #timers: NodeJS.Timeout[] = []

  constructor(options: FeedRunnerOptions) {
    this.#options = options
  }

  get count(): number {
    return this.#running.size
  }

  start(): void {
    this.#timers = [
      setInterval(() => this.reconcile(), reconcileMs),
      setInterval(() => void this.#writeProgress(), progressMs),
    ]
    this.reconcile()
  }

  /** Looks at the table now; once more where it is looking already. */
  reconcile(): void {
    if (this.#isBusy) {
      this.#isAgain = true
      return
    }
    this.#isBusy = true
    void this.#reconcileOnce()
      .catch((error: Error) => this.#options.log.warn({ err: error.message }, 'the feeds were not looked at'))
      .finally(() => {
        this.#isBusy = false
        if (!this.#isAgain) return
        this.#isAgain = false
        this.reconcile()
      })
  }

  stopTaking(): void {
    this.#isStopped = true
    for (const timer of this.#timers) clearInterval(timer)
    for (const feed of this.#running.values()) feed.stopTaking()
  }

  /** Leaves every broker, writes the last counts and gives the feeds back. */
  async stop(): Promise<void> {
    await Promise.all([...this.#running.values()].map((feed) => feed.stop()))
    await this.#writeProgress()
    await this.#release([...this.#running.keys()])
  }

  async #reconcileOnce(): Promise<void> {
    const { database, id } = this.#options
    const leased = await database.asSystemRaw('feeds', (client) =>
      leaseFeeds(client, { runner: id, leaseS: LEASE_S }),
    )
    if (this.#isStopped) return
    const wanted = new Map(leased.map((feed) => [feed.id, feed]))
    const gone: number[] = []
    for (const [feedId, running] of this.#running) {
      const feed = wanted.get(feedId)
      if (feed?.changedMs === running.feed.changedMs) continue
      await this.#end(feedId, running)
      if (!feed) gone.push(feedId)
    }
    if (gone.length > 0) await this.#release(gone)
    for (const [feedId, feed] of wanted)
      if (!this.#running.has(feedId)) this.#running.set(feedId, new RunningFeed(feed, this.#options))
  }

  async #end(feedId: number, running: RunningFeed): Promise<void> {
    await running.stop()
    const last = running.takeProgress()
    if (last) this.#unwritten.push(last)
    this.#running.delete(feedId)
  }

  #release(feedIds: readonly number[]): Promise<void> {
    const { database, id } = this.#options
    return database.asSystemRaw('feeds', (client) => releaseFeeds(client, { runner: id, feedIds }))
  }

  async #writeProgress(): Promise<void> {
    for (const feed of this.#running.values()) {
      const progress = feed.takeProgress()
      if (progress) this.#unwritten.push(progress)
    }
    const writing = this.#unwritten.splice(0)
    if (writing.length === 0) return
    try {
      await this.#options.database.asSystemRaw('feeds', async (client) => {
        for (const progress of writing) await addFeedProgress(client, progress)
      })
    } catch (error) {
      this.#unwritten.unshift(...writing)
      this.#options.log.warn({ err: (error as Error).message }, 'counts of feeds were not written')
    }
  }
}

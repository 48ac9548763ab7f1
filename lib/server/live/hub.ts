import { concernsBuilding, LIVE_CHANNEL, type LiveNotice, parseLiveNotice } from '@/lib/wire/live'
import type { Board, BoardChange } from '@/lib/wire/live-board'
import { systemClock } from '../clock'
import { database } from '../database'
import { env } from '../env'
import { log } from '../log'
import { BuildingBoard, changeBetween, samePlan } from './building-board'
import { Listener } from './listener'

export type HubEvent =
  | { kind: 'change'; change: BoardChange }
  | { kind: 'reload' }
  | { kind: 'notice'; notice: LiveNotice }
type Subscriber = (event: HubEvent) => void

/** At most this often is a building read again, however many notices come. */
const LEAST_PAUSE_MS = 400
/** States that time alone changes (no signal, minutes over) are looked at this often while someone watches. */
const TICK_MS = 10_000
/** Without a listening connection a board this old is read again when asked for. */
const STALE_MS = 2000

type Watched = {
  board: BuildingBoard
  subscribers: Set<Subscriber>
  readMs: number
  pending: NodeJS.Timeout | null
}

/**
 * The one place of this process that listens for notices and keeps the boards of the buildings that someone watches. A notice makes one
 * reading a building, however many streams are open; after a lost connection every stream is told to reload.
 */
export class LiveHub {
  private readonly watched = new Map<number, Watched>()
  private readonly listener: Listener
  private readonly ticker: NodeJS.Timeout

  constructor(url: string) {
    this.listener = new Listener(url, LIVE_CHANNEL, {
      onMessage: (payload) => this.onNotice(parseLiveNotice(payload)),
      onListening: (again) => again && this.onReconnected(),
      onLost: (error, waitMs) =>
        log().warn({ err: error, waitMs }, 'the live connection to the database was lost'),
    })
    this.ticker = setInterval(() => this.onTick(), TICK_MS)
    this.ticker.unref()
  }

  /** Calls `subscriber` for everything that happens to a building until the returned function is called. */
  subscribe(buildingId: number, subscriber: Subscriber): () => void {
    this.listener.start()
    const { subscribers } = this.of(buildingId)
    subscribers.add(subscriber)
    return () => subscribers.delete(subscriber)
  }

  /** The board of a building as the system sees it: kept while it is listened to, else read when older than two seconds. */
  async board(buildingId: number): Promise<Board | undefined> {
    this.listener.start()
    const watched = this.of(buildingId)
    const fresh = Date.now() - watched.readMs < (this.listener.listening ? TICK_MS : STALE_MS)
    if (fresh && watched.board.last) return watched.board.recompute()
    watched.readMs = Date.now()
    return watched.board.refresh()
  }

  /** How many subscribers there are in all; a test counts them after streams were dropped. */
  get subscriberCount(): number {
    return [...this.watched.values()].reduce((sum, { subscribers }) => sum + subscribers.size, 0)
  }

  async close(): Promise<void> {
    clearInterval(this.ticker)
    for (const { pending } of this.watched.values()) if (pending) clearTimeout(pending)
    await this.listener.close()
  }

  private of(buildingId: number): Watched {
    let watched = this.watched.get(buildingId)
    if (!watched) {
      const board = new BuildingBoard(buildingId, database(), systemClock)
      watched = { board, subscribers: new Set(), readMs: 0, pending: null }
      this.watched.set(buildingId, watched)
    }
    return watched
  }

  private onNotice(notice: LiveNotice | undefined): void {
    if (!notice) return
    for (const [buildingId, watched] of this.watched) {
      if (!concernsBuilding(notice, buildingId)) continue
      if (notice.kind !== 'readings') watched.board.invalidate('plan')
      for (const subscriber of watched.subscribers) subscriber({ kind: 'notice', notice })
      if (watched.subscribers.size === 0) watched.readMs = 0
      else this.readSoon(watched)
    }
  }

  /** One reading for all notices that come within the pause. */
  private readSoon(watched: Watched): void {
    if (watched.pending) return
    const waitMs = Math.max(0, watched.readMs + LEAST_PAUSE_MS - Date.now())
    watched.pending = setTimeout(() => {
      watched.pending = null
      watched.readMs = Date.now()
      const before = watched.board.last
      watched.board.refresh().then(
        (after) => after && this.tell(watched, before, after),
        (error: unknown) => log().warn({ err: error }, 'a live board could not be read'),
      )
    }, waitMs)
  }

  private tell(watched: Watched, before: Board | undefined, after: Board): void {
    if (before && !samePlan(before, after)) {
      for (const subscriber of watched.subscribers) subscriber({ kind: 'reload' })
      return
    }
    const change = changeBetween(before, after)
    if (change) for (const subscriber of watched.subscribers) subscriber({ kind: 'change', change })
  }

  private onTick(): void {
    for (const watched of this.watched.values()) {
      if (watched.subscribers.size === 0) continue
      const before = watched.board.last
      const after = watched.board.recompute()
      if (after) this.tell(watched, before, after)
    }
  }

  private onReconnected(): void {
    log().info('the live connection to the database is back')
    for (const watched of this.watched.values()) {
      watched.board.invalidate()
      watched.readMs = 0
      for (const subscriber of watched.subscribers) subscriber({ kind: 'reload' })
    }
  }
}

const holder = globalThis as unknown as { ebbmarkHub?: LiveHub }

/** The hub of this process; one also across the web server's separate bundles and hot reloads. */
export function liveHub(): LiveHub {
  holder.ebbmarkHub ??= new LiveHub(env().DATABASE_DIRECT_URL ?? env().DATABASE_URL)
  return holder.ebbmarkHub
}

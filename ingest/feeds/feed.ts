import type { FeedProgress } from '@/db/changes/feeds'
import type { ReadingRow } from '@/db/changes/readings'
import type { Device } from '@/db/queries/devices'
import type { LeasedFeed } from '@/db/queries/feeds'
import { feedAddress } from '@/lib/server/feeds/address'
import type { Incoming } from '@/lib/server/mqtt/connection'
import { mapFeedMessage } from '@/lib/wire/feed'
import { sampleOf, type WireRefusal } from '@/lib/wire/mqtt'
import type { Credentials } from '../worker/credentials'
import type { Ingest } from '../worker/ingest'
import type { Outcome, Refusal } from '../worker/messages'
import { Subscriber } from '../worker/subscriber'
import { Tally } from './tally'

/** Publishes that a feed's broker may send ahead of their acknowledgements. */
const RECEIVE_MAXIMUM = 1000
/** How long a feed's broker is asked to keep what comes while nobody is connected. */
const SESSION_EXPIRY_S = 86_400

export type FeedParts = {
  ingest: Ingest
  credentials: Credentials
  nowMs: () => number
  random: () => number
}

/** One feed at work: its messages become readings of the building's sensors, acknowledged when they are committed. */
export class RunningFeed {
  readonly feed: LeasedFeed
  readonly #parts: FeedParts
  readonly #tally = new Tally()
  readonly #subscriber: Subscriber | undefined

  constructor(feed: LeasedFeed, parts: FeedParts) {
    this.feed = feed
    this.#parts = parts
    try {
      this.#subscriber = new Subscriber({
        address: feedAddress(feed),
        clientId: `ebbmark-feed-${feed.publicId}`,
        filter: feed.topicFilter,
        receiveMaximum: RECEIVE_MAXIMUM,
        sessionExpiryS: SESSION_EXPIRY_S,
        acceptsOlder: true,
        isReady: () => parts.ingest.isOpen,
        random: parts.random,
        onMessage: (message, settle) => void this.#take(message, settle),
        onState: (state) => {
          if (state.connected) this.#tally.connected(parts.nowMs())
          else this.#tally.lost(state.why, parts.nowMs())
        },
      })
      this.#subscriber.start()
    } catch (error) {
      this.#tally.lost((error as Error).message, parts.nowMs())
    }
  }

  stopTaking(): void {
    this.#subscriber?.stopTaking()
  }

  async stop(): Promise<void> {
    await this.#subscriber?.stop()
  }

  /** What it has counted since it was last asked. */
  takeProgress(): FeedProgress | undefined {
    return this.#tally.take(this.feed.id)
  }

  async #take(message: Incoming, settle: (outcome: Outcome) => void): Promise<void> {
    const { ingest, nowMs } = this.#parts
    const receivedMs = nowMs()
    const mapped = mapFeedMessage(this.feed.mapping, message, receivedMs)
    const devices = await this.#devicesOf(mapped.readings.map(({ deviceId }) => deviceId))
    if (!devices) {
      settle('dropped')
      return
    }
    const refused: WireRefusal[] = mapped.refusals.map(({ deviceId, reason, detail }) => ({
      reason,
      detail: deviceId === null ? detail : `${deviceId}: ${detail}`,
    }))
    const readings: ReadingRow[] = []
    for (const { deviceId, reading } of mapped.readings) {
      const device = devices.get(deviceId)
      if (!device) this.#tally.candidate(deviceId, reading.co2Ppm, receivedMs)
      else if (device.retired) refused.push({ reason: 'retired-device', detail: `${deviceId} is retired` })
      else readings.push({ ...reading, sensorId: device.id, buildingId: device.buildingId, receivedMs })
    }
    const from = {
      source: `feed ${this.feed.publicId}`,
      organizationId: this.feed.organizationId,
      sensorId: null,
    }
    const sample = refused.length > 0 ? sampleOf(message.payload) : null
    const refusals: Refusal[] = refused.map((refusal) => ({ ...from, ...refusal, sample, receivedMs }))
    ingest.submit({
      from,
      readings,
      supply: [],
      refusals,
      settle: (outcome) => {
        if (outcome === 'committed')
          this.#tally.message({ readings: readings.length, refusals: refusals.length }, receivedMs)
        settle(outcome)
      },
    })
  }

  /** Registered sensors of the feed's building by the ids named; undefined while the database does not answer. */
  async #devicesOf(deviceIds: readonly string[]): Promise<Map<string, Device> | undefined> {
    const devices = new Map<string, Device>()
    try {
      for (const deviceId of new Set(deviceIds)) {
        const { credentials } = this.#parts
        const device = credentials.remembered(deviceId) ?? (await credentials.find(deviceId))
        if (device?.buildingId === this.feed.buildingId) devices.set(deviceId, device)
      }
      return devices
    } catch {
      return undefined
    }
  }
}

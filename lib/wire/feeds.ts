/** Feeds as their pages hold them. Instants are epoch seconds. */
import type { RefusalReason } from './mqtt'

export type FeedRow = {
  id: string
  name: string
  building: string
  brokerUrl: string
  topicFilter: string
  enabled: boolean
  /** since when it is connected; null while it is not */
  connectedS: number | null
  lastMessageS: number | null
  lastError: string | null
  lastErrorS: number | null
  messages: number
  readings: number
  refusals: number
}

export type FeedRefusal = {
  reason: string
  detail: string
  hourS: number
  count: number
  sample: string | null
}

/** A device id that the feed names and that is not registered in the feed's building. */
export type FeedCandidate = { deviceId: string; messages: number; lastS: number; lastCo2Ppm: string | null }

/** One message of a trial: what came and what would become of it. */
export type FeedSample = {
  topic: string
  payload: string
  readings: {
    deviceId: string
    /** stored: a registered sensor of the building; candidate: nobody of this id is registered there */
    becomes: 'stored' | 'candidate' | 'retired'
    atS: number
    co2Ppm: number
    tempC: number | null
    rhPct: number | null
  }[]
  refusals: { reason: RefusalReason; detail: string }[]
}

/** What a trial saw: samples in the order of arrival, or why there are none. */
export type FeedTrial = {
  connected: boolean
  problem: string | null
  messages: number
  samples: FeedSample[]
}

/** How long a trial listens at most, in seconds. */
export const TRIAL_SECONDS = 10
/** Samples that a trial keeps; it ends when it has them. */
export const TRIAL_SAMPLES = 12

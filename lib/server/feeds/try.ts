import { randomBytes } from 'node:crypto'
import { type Device, findSensorDevices } from '@/db/queries/devices'
import { type FeedMapping, mapFeedMessage } from '@/lib/wire/feed'
import { type FeedSample, type FeedTrial, TRIAL_SAMPLES, TRIAL_SECONDS } from '@/lib/wire/feeds'
import { sampleOf } from '@/lib/wire/mqtt'
import { deviceIdKey } from '@/lib/wire/topics'
import { systemClock } from '../clock'
import { database } from '../database'
import type { BrokerAddress } from '../mqtt/address'
import { Connection, type Incoming, OlderBroker } from '../mqtt/connection'

export type TrialOptions = {
  address: BrokerAddress
  topicFilter: string
  mapping: FeedMapping
  buildingId: number
}

/**
 * Listens to a feed for up to ten seconds with a session of its own, and says what would be stored of what came. Stores nothing; the
 * feed's own session at the broker is not touched.
 */
export async function tryFeed(options: TrialOptions): Promise<FeedTrial> {
  const seen: Incoming[] = []
  let messages = 0
  const first = await listen(options, 5, (message) => {
    messages++
    return seen.length < TRIAL_SAMPLES && seen.push(message) < TRIAL_SAMPLES
  })
  const outcome =
    first.problem instanceof OlderBroker
      ? await listen(options, 4, (message) => {
          messages++
          return seen.length < TRIAL_SAMPLES && seen.push(message) < TRIAL_SAMPLES
        })
      : first
  const receivedMs = systemClock.now().getTime()
  const mapped = seen.map((message) => ({ message, ...mapFeedMessage(options.mapping, message, receivedMs) }))
  const ids = new Set(mapped.flatMap(({ readings }) => readings.map(({ deviceId }) => deviceIdKey(deviceId))))
  const devices = await devicesOf([...ids], options.buildingId)
  const samples = mapped.map(
    ({ message, readings, refusals }): FeedSample => ({
      topic: message.topic,
      payload: sampleOf(message.payload),
      readings: readings.slice(0, 20).map(({ deviceId, reading }) => {
        const device = devices.get(deviceIdKey(deviceId))
        const { atMs, co2Ppm, tempC, rhPct } = reading
        const becomes = !device ? 'candidate' : device.retired ? 'retired' : 'stored'
        return { deviceId, becomes, atS: atMs / 1000, co2Ppm, tempC, rhPct }
      }),
      refusals: refusals.slice(0, 20).map(({ reason, detail }) => ({ reason, detail })),
    }),
  )
  return {
    connected: outcome.connected,
    problem: outcome.problem?.message ?? null,
    messages,
    samples,
  }
}

/** Connects and hands on what comes until `wants` says no more, ten seconds are over, or the connection ends. */
async function listen(
  { address, topicFilter }: TrialOptions,
  version: 4 | 5,
  wants: (message: Incoming) => boolean,
): Promise<{ connected: boolean; problem: Error | null }> {
  let isOver = false
  let over: () => void = () => undefined
  const enough = new Promise<'enough'>((resolve) => {
    over = () => resolve('enough')
  })
  const connection = new Connection({
    address,
    clientId: `ebbmark-try-${randomBytes(6).toString('hex')}`,
    filter: topicFilter,
    version,
    receiveMaximum: TRIAL_SAMPLES * 4,
    sessionExpiryS: 0,
    onMessage: (message, settle) => {
      settle('committed')
      if (isOver || wants(message)) return
      isOver = true
      over()
    },
  })
  let connected = false
  connection.opened.then(
    () => (connected = true),
    () => undefined,
  )
  const late = setTimeout(over, TRIAL_SECONDS * 1000)
  const ended = await Promise.race([enough, connection.closed])
  clearTimeout(late)
  if (ended !== 'enough') return { connected, problem: ended }
  connection.leave()
  await connection.closed
  const problem = connected ? null : new Error(`the broker has not answered within ${TRIAL_SECONDS} s`)
  return { connected, problem }
}

/** Sensors of this building alone: what is registered elsewhere looks like what is registered nowhere. */
async function devicesOf(keys: string[], buildingId: number): Promise<Map<string, Device>> {
  if (keys.length === 0) return new Map()
  const found = await database().asSystemRaw('try a feed', (client) => findSensorDevices(client, keys))
  const own = found.filter((device) => device.buildingId === buildingId)
  return new Map(own.map((device) => [deviceIdKey(device.deviceId), device]))
}

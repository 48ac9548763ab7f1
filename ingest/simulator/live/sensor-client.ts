import mqtt, { type MqttClient } from 'mqtt'
import { topicOf } from '@/lib/wire/topics'

/** Readings in one message at most (store and forward), and those kept while nobody takes them: two weeks of minutes. */
const MESSAGE_MAX = 500
const KEPT_MAX = 14 * 1440
/** Pause before the next try to connect: first, longest, and the one after a refusal of the credentials. */
const RETRY_FIRST_MS = 1000
const RETRY_MOST_MS = 30_000
const RETRY_REFUSED_MS = 120_000

export type ReadingMessage = {
  t: string
  co2_ppm: number
  temp_c: number
  rh_pct: number
  battery_pct: number
  rssi_dbm: number
}

export type SensorClientOptions = {
  url: string
  site: string
  deviceId: string
  secret: string
  /** what went wrong with the connection, in words, once a kind */
  onTrouble: (words: string) => void
}

/**
 * One sensor on the air: its own connection and credentials, readings kept until the broker has acknowledged them, oldest first,
 * one message under way at a time.
 */
export class SensorClient {
  private readonly client: MqttClient
  private readonly kept: ReadingMessage[] = []
  private isSending = false
  private isEnding = false
  private lastTrouble = ''
  acknowledged = 0

  constructor(private readonly options: SensorClientOptions) {
    const { url, site, deviceId, secret } = options
    this.client = mqtt.connect(url, {
      clientId: deviceId,
      username: deviceId,
      password: secret,
      clean: true,
      keepalive: 60,
      protocolVersion: 4,
      reconnectPeriod: RETRY_FIRST_MS,
      reconnectOnConnackError: true, // refused while the store is away: it comes again
      will: {
        topic: topicOf(site, deviceId, 'status'),
        payload: Buffer.from('offline'),
        qos: 1,
        retain: true,
      },
    })
    this.client.on('connect', () => this.connected())
    this.client.on('error', (error) => this.troubled(error))
    this.client.on('close', () => this.slowDown())
  }

  /** Readings that wait for their acknowledgement. */
  get waiting(): number {
    return this.kept.length
  }

  get isConnected(): boolean {
    return this.client.connected
  }

  /** Takes a reading to publish; where more are kept than a sensor can hold, the oldest goes. */
  take(reading: ReadingMessage): void {
    this.kept.push(reading)
    if (this.kept.length > KEPT_MAX && !this.isSending) this.kept.shift()
    this.send()
  }

  /** Says goodbye and closes; waits no longer than `withinMs` for what is under way. */
  async end(withinMs: number): Promise<void> {
    this.isEnding = true
    if (!this.client.connected) {
      await this.client.endAsync(true).catch(() => undefined)
      return
    }
    const { site, deviceId } = this.options
    const goodbye = this.client
      .publishAsync(topicOf(site, deviceId, 'status'), 'offline', { qos: 1, retain: true })
      .then(() => this.client.endAsync())
      .catch(() => undefined)
    const late = new Promise<'late'>((resolve) => setTimeout(() => resolve('late'), withinMs).unref())
    if ((await Promise.race([goodbye, late])) === 'late')
      await this.client.endAsync(true).catch(() => undefined)
  }

  private connected(): void {
    this.lastTrouble = ''
    this.client.options.reconnectPeriod = RETRY_FIRST_MS
    const { site, deviceId } = this.options
    this.client.publish(
      topicOf(site, deviceId, 'status'),
      'online',
      { qos: 1, retain: true },
      () => undefined,
    )
    this.send()
  }

  private send(): void {
    if (this.isSending || this.isEnding || this.kept.length === 0 || !this.client.connected) return
    const part = this.kept.slice(0, MESSAGE_MAX)
    const payload = JSON.stringify(part.length === 1 ? part[0] : part)
    this.isSending = true
    const { site, deviceId } = this.options
    // while the connection is away the library keeps this one message and sends it again
    this.client.publish(topicOf(site, deviceId, 'readings'), payload, { qos: 1 }, (error) => {
      this.isSending = false
      if (error) return
      this.kept.splice(0, part.length)
      this.acknowledged += part.length
      this.send()
    })
  }

  private troubled(error: Error & { code?: unknown }): void {
    const refused = error.code === 4 || error.code === 5 || error.code === 2
    if (refused) this.client.options.reconnectPeriod = RETRY_REFUSED_MS
    const words = refused ? `the broker refused ${this.options.deviceId}: ${error.message}` : error.message
    if (words !== this.lastTrouble) this.options.onTrouble(words)
    this.lastTrouble = words
  }

  private slowDown(): void {
    const { options } = this.client
    const before = options.reconnectPeriod ?? RETRY_FIRST_MS
    if (before < RETRY_MOST_MS) options.reconnectPeriod = Math.min(RETRY_MOST_MS, before * 2)
  }
}

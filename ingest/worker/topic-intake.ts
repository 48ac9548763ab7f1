import type { Device } from '@/db/queries/devices'
import type { Incoming } from '@/lib/server/mqtt/connection'
import { type RefusalReason, sampleOf } from '@/lib/wire/mqtt'
import { gatewayUserName, parseTopic, type Topic, topicOf } from '@/lib/wire/topics'
import type { Credentials } from './credentials'
import type { Ingest } from './ingest'
import type { Message, Outcome } from './messages'
import { sourceOf, takePublish } from './take'

/**
 * Messages of an outside broker, which has made sure that a device publishes under its own topic alone: the topic says whose it is. What
 * belongs to nobody is recorded as refused, and acknowledged like the rest.
 */
export class TopicIntake {
  readonly #ingest: Ingest
  readonly #credentials: Credentials
  readonly #nowMs: () => number

  constructor(options: { ingest: Ingest; credentials: Credentials; nowMs: () => number }) {
    this.#ingest = options.ingest
    this.#credentials = options.credentials
    this.#nowMs = options.nowMs
  }

  /** Takes a message; it settles when it is committed, or given back because the database is away. */
  take(message: Incoming, settle: (outcome: Outcome) => void): void {
    const receivedMs = this.#nowMs()
    const topic = parseTopic(message.topic)
    if (!topic) {
      const detail = `${JSON.stringify(message.topic.slice(0, 120))}: expected ${topicOf('{site}', '{sensor}', 'readings')}`
      this.#refuse(message, receivedMs, { reason: 'wrong-topic', detail, settle })
      return
    }
    const known = this.#remembered(topic)
    if (known) {
      this.#submit(known, message, receivedMs, settle)
      return
    }
    this.#find(topic).then(
      (device) => this.#submit(device, message, receivedMs, settle),
      () => settle('dropped'),
    )
  }

  #submit(
    device: Device | undefined,
    message: Incoming,
    receivedMs: number,
    settle: Message['settle'],
  ): void {
    if (device && !device.retired) {
      const { topic, payload, held } = message
      this.#ingest.submit({ ...takePublish(device, topic, payload, receivedMs, held), settle })
      return
    }
    const reason = device ? 'retired-device' : 'unknown-device'
    const detail = `message on ${JSON.stringify(message.topic.slice(0, 120))}`
    this.#refuse(message, receivedMs, { reason, detail, settle, device })
  }

  #refuse(
    { topic, payload }: Incoming,
    receivedMs: number,
    why: { reason: RefusalReason; detail: string; settle: Message['settle']; device?: Device | undefined },
  ): void {
    const nobody = { source: `topic ${topic.slice(0, 150)}`, organizationId: null, sensorId: null }
    const from = why.device ? sourceOf(why.device) : nobody
    const { reason, detail, settle } = why
    const refusal = { ...from, reason, detail, sample: sampleOf(payload), receivedMs }
    this.#ingest.submit({ from, readings: [], supply: [], refusals: [refusal], settle })
  }

  #remembered({ site, device, leaf }: Topic): Device | undefined {
    if (leaf === 'supply') return this.#credentials.remembered(gatewayUserName(site, device))
    return this.#credentials.remembered(device)
  }

  /** A status may be a sensor's or a gateway's; the other topics say which. */
  async #find({ site, device, leaf }: Topic): Promise<Device | undefined> {
    const sensor = leaf === 'supply' ? undefined : await this.#credentials.find(device)
    if (sensor || leaf === 'readings') return sensor
    return this.#credentials.find(gatewayUserName(site, device))
  }
}

import type { Device } from '@/db/queries/devices'
import {
  parseReadings,
  parseStatus,
  parseSupply,
  type RefusalReason,
  sampleOf,
  type WireRefusal,
} from '@/lib/wire/mqtt'
import { parseTopic, type TopicLeaf, topicOf } from '@/lib/wire/topics'
import type { Message, Source } from './messages'

/** What a publish brings, before anyone waits for it. `retain`: a status that the broker keeps. */
export type Taken = Omit<Message, 'settle'> & { retain: boolean }

/** How refusals name a device. */
export function sourceOf(device: Device): Source {
  return {
    source: device.userName,
    organizationId: device.organizationId,
    sensorId: device.kind === 'sensor' ? device.id : null,
  }
}

const ownLeaves: Record<Device['kind'], readonly TopicLeaf[]> = {
  sensor: ['readings', 'status'],
  gateway: ['supply', 'status'],
}

/** The leaf where the topic is one of the device's own, compared without case in the device. */
function ownLeaf(device: Device, topic: string): TopicLeaf | undefined {
  const parsed = parseTopic(topic)
  const isOwn = parsed?.site === device.site && parsed.device.toLowerCase() === device.deviceId.toLowerCase()
  return isOwn && ownLeaves[device.kind].includes(parsed.leaf) ? parsed.leaf : undefined
}

/**
 * Reads one publish of a device at its arrival (epoch milliseconds): rows to store and refusals to record. `held`: a broker may have kept
 * it, so that its arrival stands for no missing time. Never throws.
 */
export function takePublish(
  device: Device,
  topic: string,
  payload: Uint8Array,
  receivedMs: number,
  held = false,
): Taken {
  const from = sourceOf(device)
  const taken: Taken = { from, readings: [], supply: [], refusals: [], retain: false }
  let sample: string | undefined
  const refuse = (refusal: WireRefusal) => {
    sample ??= sampleOf(payload)
    taken.refusals.push({ ...from, ...refusal, sample, receivedMs })
  }
  const leaf = ownLeaf(device, topic)
  if (leaf === undefined) refuse(wrongTopic(device, topic))
  else if (leaf === 'readings') {
    const parsed = parseReadings(payload, receivedMs, held)
    const { id: sensorId, buildingId } = device
    taken.readings = parsed.readings.map((reading) => ({ ...reading, sensorId, buildingId, receivedMs }))
    parsed.refusals.forEach(refuse)
  } else if (leaf === 'status') {
    const parsed = parseStatus(payload)
    if ('reason' in parsed) refuse(parsed)
    else taken.retain = true
  } else {
    const parsed = parseSupply(payload, receivedMs, held)
    const { id: airHandlerId, organizationId, buildingId } = device
    if ('reason' in parsed) refuse(parsed)
    else taken.supply = [{ ...parsed, airHandlerId, organizationId, buildingId, receivedMs }]
  }
  return taken
}

function wrongTopic(device: Device, topic: string): { reason: RefusalReason; detail: string } {
  const own = ownLeaves[device.kind].map((leaf) => topicOf(device.site, device.deviceId, leaf))
  return {
    reason: 'wrong-topic',
    detail: `${JSON.stringify(topic.slice(0, 120))}: expected ${own.join(' or ')}`,
  }
}

import type { EventEmitter } from 'node:events'
import type { Client } from 'aedes'
import { LIMITS } from './limits'

type Packet = { cmd: string; topic?: string; length: number }
type Parser = EventEmitter & { packet: Packet; parse: (bytes: Buffer) => number }

/** Topic levels from which on the broker library would close the connection. */
const TOPIC_LEVELS_MAX = 50

/** Stands in for a topic that no device may publish to and that the broker library would close the connection for. */
const stand = 'refused'

const originals = new WeakMap<object, string>()

/** The topic as the device wrote it. */
export function writtenTopic(packet: { topic: string }): string {
  return originals.get(packet) ?? packet.topic
}

/**
 * Watches the bytes of one connection before the broker library acts on them: an impossible topic (empty, wildcards, too deep) gets a
 * stand-in, so that it is refused and acknowledged like any wrong topic; a packet that announces more bytes than allowed ends the
 * connection before they are taken in.
 */
export function guardConnection(
  client: Client,
  events: { onOversize: (bytes: number) => void; onBrokenBytes: (error: Error) => void },
): void {
  const parser = (client as unknown as { _parser: Parser })._parser
  parser.prependListener('packet', (packet: Packet) => {
    if (packet.cmd !== 'publish' || packet.topic === undefined || isPossible(packet.topic)) return
    originals.set(packet, packet.topic)
    packet.topic = stand
  })
  parser.prependListener('error', events.onBrokenBytes)
  const parse = parser.parse.bind(parser)
  parser.parse = (bytes) => {
    const left = parse(bytes)
    const most = client.connected ? LIMITS.packetMaxBytes : LIMITS.connectPacketMaxBytes
    if (parser.packet.length > most && !client.closed) {
      events.onOversize(parser.packet.length)
      client.conn.destroy()
    }
    return left
  }
}

function isPossible(topic: string): boolean {
  return topic.length > 0 && !/[+#]/.test(topic) && topic.split('/').length <= TOPIC_LEVELS_MAX
}

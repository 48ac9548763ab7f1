import { LIVE_EVENTS, type LiveEventName } from '@/lib/wire/live-board'

export type LiveMessage = { event: LiveEventName; data: unknown }
/** `open`: events arrive. `waiting`: not yet, or broken and coming back. */
export type LiveState = 'open' | 'waiting'
type Handlers = { onMessage: (message: LiveMessage) => void; onState: (state: LiveState) => void }

const FIRST_WAIT_MS = 2000
const LONGEST_WAIT_MS = 30_000

/**
 * One event source that comes back for good: the browser reconnects by itself after a lost line; after an answer that is no stream
 * (server restarting, too many) it is opened anew after a growing, spread wait. Every return says `reload`. Returns what ends it.
 */
export function openStream(url: string, { onMessage, onState }: Handlers): () => void {
  let source: EventSource | null = null
  let timer: ReturnType<typeof setTimeout> | undefined
  let failures = 0
  let opened = false
  const connect = () => {
    source = new EventSource(url)
    source.onopen = () => {
      failures = 0
      onState('open')
      if (opened) onMessage({ event: 'reload', data: {} })
      opened = true
    }
    source.onerror = () => {
      onState('waiting')
      if (source?.readyState !== EventSource.CLOSED) return
      failures += 1
      const wait = Math.min(LONGEST_WAIT_MS, FIRST_WAIT_MS * 2 ** (failures - 1))
      timer = setTimeout(connect, wait * (0.5 + Math.random() / 2))
      // an answer of 401 is no stream either: the snapshot says which it was
      onMessage({ event: 'reload', data: {} })
    }
    for (const event of LIVE_EVENTS) {
      source.addEventListener(event, ({ data }: MessageEvent<string>) =>
        onMessage({ event, data: JSON.parse(data) }),
      )
    }
  }
  connect()
  return () => {
    clearTimeout(timer)
    source?.close()
  }
}

import { type LiveMessage, type LiveState, openStream } from './stream'

type Posted = { message: LiveMessage } | { state: LiveState } | { hello: true }
type Listener = { onMessage: (message: LiveMessage) => void; onState: (state: LiveState) => void }

/**
 * One stream a browser: the tabs of an address elect a leader by a lock; the leader holds the event source and passes on what it hears.
 * When the leader's tab closes, the lock goes to the next, whose new stream begins with the whole board.
 */
class SharedStream {
  private readonly listeners = new Set<Listener>()
  private channel: BroadcastChannel | null = null
  private stop: (() => void) | null = null
  private state: LiveState = 'waiting'
  private leads = false

  constructor(private readonly url: string) {}

  listen(listener: Listener): () => void {
    this.listeners.add(listener)
    listener.onState(this.state)
    if (this.listeners.size === 1) this.begin()
    return () => {
      this.listeners.delete(listener)
      if (this.listeners.size === 0) this.end()
    }
  }

  private begin(): void {
    const canShare = 'locks' in navigator && 'BroadcastChannel' in globalThis
    if (!canShare) {
      this.stop = this.lead()
      return
    }
    const name = `ebbmark live ${this.url}`
    const channel = new BroadcastChannel(name)
    this.channel = channel
    channel.onmessage = ({ data }: MessageEvent<Posted>) => this.hear(data)
    const abort = new AbortController()
    let letGo: () => void = () => undefined
    this.stop = () => {
      abort.abort()
      letGo()
      channel.close()
    }
    navigator.locks
      .request(name, { signal: abort.signal }, () => {
        if (abort.signal.aborted) return
        const close = this.lead()
        this.leads = true
        return new Promise<void>((resolve) => {
          letGo = () => {
            this.leads = false
            close()
            resolve()
          }
        })
      })
      .catch(() => undefined)
    channel.postMessage({ hello: true } satisfies Posted)
  }

  private end(): void {
    this.stop?.()
    this.stop = null
    this.channel = null
    this.state = 'waiting'
  }

  /** Opens the event source and passes on to the other tabs what it says. */
  private lead(): () => void {
    return openStream(this.url, {
      onMessage: (message) => {
        this.channel?.postMessage({ message } satisfies Posted)
        this.tell(message)
      },
      onState: (state) => {
        this.channel?.postMessage({ state } satisfies Posted)
        this.setState(state)
      },
    })
  }

  /** What another tab says: its messages when it leads, or that it has come and wants to know how things stand. */
  private hear(posted: Posted): void {
    if ('hello' in posted) {
      if (this.leads) this.channel?.postMessage({ state: this.state } satisfies Posted)
    } else if ('state' in posted) this.setState(posted.state)
    else this.tell(posted.message)
  }

  private setState(state: LiveState): void {
    if (state === this.state) return
    this.state = state
    for (const listener of this.listeners) listener.onState(state)
    // a tab that follows has missed what came before it listened
    if (state === 'open' && !this.leads) this.tell({ event: 'reload', data: {} })
  }

  private tell(message: LiveMessage): void {
    for (const listener of this.listeners) listener.onMessage(message)
  }
}

const streams = new Map<string, SharedStream>()

/** Listens to the stream at this address; the first listener opens it, the last one closes it. */
export function listenTo(url: string, listener: Listener): () => void {
  let stream = streams.get(url)
  if (!stream) {
    stream = new SharedStream(url)
    streams.set(url, stream)
  }
  return stream.listen(listener)
}

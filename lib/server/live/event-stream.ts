import { Refusal } from '@/lib/errors'
import { can } from '@/lib/policy/permissions'
import { wallScopeOf } from '@/lib/policy/scope'
import type { LiveEventName } from '@/lib/wire/live-board'
import { readSession, type Signed } from '../auth/session'
import { log } from '../log'
import { type HubEvent, liveHub } from './hub'
import { registerStream } from './streams'
import { type Visible, visibleChange, visibleFor } from './visible'

const HEARTBEAT_MS = 20_000
const SESSION_CHECK_MS = 30_000
/** One stream a browser is shared between its tabs, so this is generous. */
export const STREAMS_PER_PERSON = 12
/** What a browser waits before it connects again. */
const RETRY_MS = 2000
/** A reader that does not take what is sent is let go, and comes back for a snapshot. */
const MOST_WAITING = 256

const perPerson = new Map<number, number>()

export type StreamOptions = { signed: Signed; buildingId: number; wall: boolean; signal: AbortSignal }

/** An event stream of one building for one person: what their scope allows, until they leave, sign out or the server ends. */
export function liveResponse(options: StreamOptions): Response {
  const userId = options.signed.person.id
  const open = perPerson.get(userId) ?? 0
  if (open >= STREAMS_PER_PERSON) {
    throw new Refusal(
      'too-many',
      'Too many live connections of one person. Close some windows, then load this page again.',
      {
        retryAfterSeconds: 30,
      },
    )
  }
  perPerson.set(userId, open + 1)
  const stream = new LiveStream(options, () => {
    const left = (perPerson.get(userId) ?? 1) - 1
    if (left > 0) perPerson.set(userId, left)
    else perPerson.delete(userId)
  })
  return new Response(stream.readable, {
    headers: {
      'Content-Type': 'text/event-stream; charset=utf-8',
      'Cache-Control': 'no-cache, no-transform',
      'X-Accel-Buffering': 'no',
      Connection: 'keep-alive',
    },
  })
}

class LiveStream {
  readonly readable: ReadableStream<Uint8Array>
  private readonly encoder = new TextEncoder()
  private controller: ReadableStreamDefaultController<Uint8Array> | null = null
  private visible: Visible = new Map()
  private readonly cleanups: (() => void)[] = []
  private ended = false

  constructor(
    private readonly options: StreamOptions,
    private readonly onClosed: () => void,
  ) {
    this.readable = new ReadableStream({
      start: (controller) => this.start(controller),
      cancel: () => this.close(),
    })
  }

  private start(controller: ReadableStreamDefaultController<Uint8Array>): void {
    this.controller = controller
    const { signal, buildingId } = this.options
    if (signal.aborted) {
      this.close()
      return
    }
    const onAbort = () => this.close()
    signal.addEventListener('abort', onAbort)
    const beat = setInterval(() => this.write(': beat\n\n'), HEARTBEAT_MS)
    const check = setInterval(() => void this.checkSession(), SESSION_CHECK_MS)
    this.cleanups.push(
      () => signal.removeEventListener('abort', onAbort),
      () => clearInterval(beat),
      () => clearInterval(check),
      liveHub().subscribe(buildingId, (event) => void this.onEvent(event)),
      registerStream(() => this.close()),
    )
    this.write(`retry: ${RETRY_MS}\n\n`)
    this.sendWhole().catch((error: unknown) => this.fail(error))
  }

  private get scope() {
    const { signed, wall } = this.options
    return wall ? wallScopeOf(signed.scope) : signed.scope
  }

  private get seesRooms(): boolean {
    return can(this.options.signed.membership.roles, 'room.read')
  }

  /** First the whole board as a change, so that nothing is missed between the page and the stream. */
  private async sendWhole(): Promise<void> {
    if (!this.seesRooms) return
    const { buildingId } = this.options
    // who may see what comes first: a change that arrives meanwhile is then sent too
    this.visible = await visibleFor(this.scope, buildingId)
    const board = await liveHub().board(buildingId)
    if (board) this.send('rooms', visibleChange(board, this.visible))
  }

  private async onEvent(event: HubEvent): Promise<void> {
    if (event.kind === 'notice') {
      if (event.notice.kind === 'session') await this.checkSession()
      else this.send('notice', { kind: event.notice.kind })
    } else if (!this.seesRooms) return
    else if (event.kind === 'reload') this.send('reload', {})
    else this.send('rooms', visibleChange(event.change, this.visible))
  }

  /** Whether the session stands, and what its person may see by now. */
  private async checkSession(): Promise<void> {
    try {
      const signed = await readSession(this.options.signed.sessionId)
      if (!signed || !can(signed.membership.roles, 'api.live')) {
        this.send('ended', {})
        this.close()
        return
      }
      this.options.signed = signed
      if (this.seesRooms) this.visible = await visibleFor(this.scope, this.options.buildingId)
    } catch (error) {
      this.fail(error)
    }
  }

  /** Nothing is sent while it is not known whether it may be: the reader connects again. */
  private fail(error: unknown): void {
    log().warn({ err: error }, 'a live stream was closed')
    this.close()
  }

  private send(event: LiveEventName, data: unknown): void {
    if (data !== null) this.write(`event: ${event}\ndata: ${JSON.stringify(data)}\n\n`)
  }

  private write(text: string): void {
    if (this.ended || !this.controller) return
    try {
      this.controller.enqueue(this.encoder.encode(text))
      if ((this.controller.desiredSize ?? 0) < -MOST_WAITING) this.close()
    } catch {
      this.close()
    }
  }

  private close(): void {
    if (this.ended) return
    this.ended = true
    for (const cleanup of this.cleanups.splice(0)) cleanup()
    try {
      this.controller?.close()
    } catch {
      // the reader has already gone
    }
    this.onClosed()
  }
}

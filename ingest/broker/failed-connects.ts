import { LIMITS } from './limits'

const minuteMs = 60_000
const pairsMax = 50_000

/** Counts failed connects of each address and user name in the running minute; a pair over the limit is refused unread. */
export class FailedConnects {
  #counts = new Map<string, { count: number; sinceMs: number }>()

  isLocked(address: string, userName: string, nowMs: number): boolean {
    const held = this.#counts.get(keyOf(address, userName))
    return (
      held !== undefined && nowMs - held.sinceMs < minuteMs && held.count >= LIMITS.failedConnectsPerMinute
    )
  }

  add(address: string, userName: string, nowMs: number): void {
    const key = keyOf(address, userName)
    const held = this.#counts.get(key)
    if (held && nowMs - held.sinceMs < minuteMs) held.count++
    else this.#counts.set(key, { count: 1, sinceMs: nowMs })
    if (this.#counts.size > pairsMax) this.#forgetOld(nowMs)
  }

  clear(address: string, userName: string): void {
    this.#counts.delete(keyOf(address, userName))
  }

  #forgetOld(nowMs: number): void {
    for (const [key, held] of this.#counts) if (nowMs - held.sinceMs >= minuteMs) this.#counts.delete(key)
    if (this.#counts.size > pairsMax) this.#counts.clear()
  }
}

function keyOf(address: string, userName: string): string {
  return `${address} ${userName.slice(0, 128).toLowerCase()}`
}

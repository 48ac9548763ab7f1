import { type RefusalRow, refusalHourMs } from '@/db/changes/refusals'
import type { Refusal } from './messages'

/** Different (source, reason, hour) that are held at once; beyond, strangers are counted together. */
const KEYS_MAX = 5000

/** Counts refusals by source, reason and UTC hour, with the first one's detail and sample. Bounded, whatever strangers send. */
export class RefusalBook {
  #rows = new Map<string, RefusalRow>()

  get size(): number {
    return this.#rows.size
  }

  add(refusal: Refusal): void {
    this.#merge({
      organizationId: refusal.organizationId,
      sensorId: refusal.sensorId,
      source: refusal.source,
      reason: refusal.reason,
      count: 1,
      firstMs: refusal.receivedMs,
      lastMs: refusal.receivedMs,
      detail: refusal.detail,
      sample: refusal.sample,
    })
  }

  /** Takes all rows out. */
  take(): RefusalRow[] {
    const rows = [...this.#rows.values()]
    this.#rows.clear()
    return rows
  }

  /** Puts rows back whose transaction failed. */
  putBack(rows: readonly RefusalRow[]): void {
    for (const row of rows) this.#merge({ ...row })
  }

  #merge(row: RefusalRow): void {
    const full = this.#rows.size >= KEYS_MAX && !this.#rows.has(keyOf(row))
    const counted = full ? { ...row, source: 'many sources', organizationId: null, sensorId: null } : row
    const held = this.#rows.get(keyOf(counted))
    if (!held) {
      this.#rows.set(keyOf(counted), counted)
      return
    }
    held.count += counted.count
    held.firstMs = Math.min(held.firstMs, counted.firstMs)
    held.lastMs = Math.max(held.lastMs, counted.lastMs)
  }
}

function keyOf(row: RefusalRow): string {
  return `${row.source}\n${row.reason}\n${refusalHourMs(row.firstMs)}`
}

import type { ReadingRow } from '@/db/changes/readings'
import type { SupplyStateRow } from '@/db/changes/supply-states'
import type { Outcome } from '@/lib/server/mqtt/acknowledgements'
import type { RefusalReason } from '@/lib/wire/mqtt'

/** Who a message or a connect came from, as refusals name it. */
export type Source = { source: string; organizationId: number | null; sensorId: number | null }

/** Something that was refused, at its arrival (epoch milliseconds). */
export type Refusal = Source & {
  reason: RefusalReason
  detail: string
  sample: string | null
  receivedMs: number
}

export type { Outcome }

/** One message taken from a device. `settle` is called once; until then the device waits for its acknowledgement. */
export type Message = {
  from: Source
  readings: ReadingRow[]
  supply: SupplyStateRow[]
  refusals: Refusal[]
  settle: (outcome: Outcome) => void
}

/** Rows that a message brings to a batch. */
export function weightOf(message: Message): number {
  return message.readings.length + message.supply.length + message.refusals.length
}

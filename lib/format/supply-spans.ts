import { scheduledPeriods } from '@/lib/air/decay/modes'
import type { SupplyHours } from '@/lib/air/types'
import { localDate } from '@/lib/time'

export type SupplySpan = { fromS: number; toS: number }
type Status = { atS: number; state: 'on' | 'reduced' | 'off' }

/** Closed days of a building, local dates, both ends included. */
export type Closure = { fromDate: string; toDate: string }

/**
 * When the supply was on between two instants: by its status signal where there is one, else by its weekly hours without closed days.
 * A status holds until the next.
 */
export function supplySpans(
  supply: { states: readonly Status[]; hours: readonly SupplyHours[]; closures: readonly Closure[] },
  fromS: number,
  toS: number,
  timeZone: string,
): SupplySpan[] {
  const { states, hours, closures } = supply
  const spans =
    states.length > 0
      ? states.flatMap((status, i) =>
          status.state === 'off' ? [] : [{ fromS: status.atS, toS: states[i + 1]?.atS ?? toS }],
        )
      : scheduledPeriods(hours, fromS, toS, timeZone).filter(
          (period) => !isClosed(closures, localDate(period.fromS, timeZone)),
        )
  return spans
    .map((span) => ({ fromS: Math.max(fromS, span.fromS), toS: Math.min(toS, span.toS) }))
    .filter((span) => span.toS > span.fromS)
    .sort((a, b) => a.fromS - b.fromS)
}

const isClosed = (closures: readonly Closure[], date: string) =>
  closures.some(({ fromDate, toDate }) => date >= fromDate && date <= toDate)

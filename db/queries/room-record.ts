import { and, asc, eq, gt, isNull, lt, sql } from 'drizzle-orm'
import type { RoomDecay } from '@/lib/wire/rooms'
import type { Tx } from '../client'
import { decays, hours } from '../schema'

/** Decays of the room's lead sensor in force that touch the span, oldest first. */
export function listRoomDecays(
  tx: Tx,
  { roomId, fromS, toS }: { roomId: number; fromS: number; toS: number },
): Promise<RoomDecay[]> {
  return tx
    .select({
      id: decays.publicId,
      startS: sql<number>`extract(epoch from ${decays.startAt})::double precision`,
      endS: sql<number>`extract(epoch from ${decays.endAt})::double precision`,
      rate: decays.airChangeRatePerHour,
      rateLow: decays.airChangeRateLowPerHour,
      rateHigh: decays.airChangeRateHighPerHour,
      mode: decays.mode,
      quality: decays.quality,
      sentence: decays.sentence,
    })
    .from(decays)
    .where(
      and(
        eq(decays.roomId, roomId),
        eq(decays.lead, true),
        isNull(decays.supersededAt),
        gt(decays.endAt, new Date(fromS * 1000)),
        lt(decays.startAt, new Date(toS * 1000)),
      ),
    )
    .orderBy(asc(decays.startAt))
}

export type SupplyRecord = {
  states: { atS: number; state: 'on' | 'reduced' | 'off' }[]
  hours: { days: number[]; from: string; to: string }[]
}

/** Status of the room's air handler from the state before `fromS` on, and its weekly hours for when it reports none. */
export async function readSupply(
  tx: Tx,
  { airHandlerId, fromS, toS }: { airHandlerId: number; fromS: number; toS: number },
): Promise<SupplyRecord> {
  const { rows } = await tx.execute<{ atS: number; state: 'on' | 'reduced' | 'off' }>(sql`
    SELECT extract(epoch from at)::double precision AS "atS", state FROM supply_states
    WHERE air_handler_id = ${airHandlerId} AND at < to_timestamp(${toS}) AND at >= coalesce(
      (SELECT max(at) FROM supply_states WHERE air_handler_id = ${airHandlerId} AND at <= to_timestamp(${fromS})), to_timestamp(${fromS}))
    ORDER BY at`)
  const weekly = await tx
    .select({ days: hours.days, from: hours.fromLocal, to: hours.toLocal })
    .from(hours)
    .where(and(eq(hours.airHandlerId, airHandlerId), eq(hours.purpose, 'supply')))
  return { states: rows, hours: weekly }
}

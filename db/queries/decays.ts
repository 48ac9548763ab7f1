import { and, asc, desc, eq, gte, isNull, lt, lte, ne, type SQL, sql } from 'drizzle-orm'
import type { Reason } from '@/lib/air/types'
import type { DecaySummary } from '@/lib/wire/decays'
import type { Tx } from '../client'
import { decayReviews, decays, placements, rooms, sensors } from '../schema'

const epoch = (column: SQL | typeof decays.startAt) =>
  sql<number>`extract(epoch from ${column})::double precision`

/** Columns of a decay in a list; `decision` is the newest review of this room and interval that was not withdrawn. */
export const summaryColumns = {
  id: decays.publicId,
  roomId: rooms.publicId,
  roomNumber: rooms.number,
  roomName: rooms.name,
  sensor: sensors.label,
  position: sql<string>`coalesce((SELECT p.position FROM ${placements} p WHERE p.sensor_id = ${decays.sensorId} AND p.from_at <= ${decays.startAt} AND (p.to_at IS NULL OR p.to_at > ${decays.startAt})), 'room')`,
  night: decays.night,
  startS: epoch(decays.startAt),
  endS: epoch(decays.endAt),
  kind: decays.kind,
  rate: decays.airChangeRatePerHour,
  rateLow: decays.airChangeRateLowPerHour,
  rateHigh: decays.airChangeRateHighPerHour,
  mode: decays.mode,
  modeFrom: decays.modeFrom,
  quality: decays.quality,
  reasons: sql<Reason[]>`${decays.reasons}`,
  sentence: decays.sentence,
  decision: sql<
    DecaySummary['decision']
  >`(SELECT v.decision FROM ${decayReviews} v WHERE v.sensor_id = ${decays.sensorId}
    AND v.withdrawn_at IS NULL AND v.from_at < ${decays.endAt} AND v.to_at > ${decays.startAt} ORDER BY v.created_at DESC LIMIT 1)`,
}

/** No decision in force covers any part of the decay. */
const undecided = sql`NOT EXISTS (SELECT FROM ${decayReviews} v WHERE v.sensor_id = ${decays.sensorId}
    AND v.withdrawn_at IS NULL AND v.from_at < ${decays.endAt} AND v.to_at > ${decays.startAt})`

export type DecayFilter = {
  buildingId: number
  show: 'to review' | 'accepted' | 'doubtful' | 'refused' | 'all'
  roomPublicId?: string
  mode?: string
  /** building-local date, first night that counts */
  sinceNight: string
  /** epoch seconds: only decays that start before it (paging) */
  beforeS?: number
  limit: number
}

/** Decays of lead sensors in force (not superseded), newest first. "To review" are doubtful ones without a decision. */
export async function listDecays(tx: Tx, filter: DecayFilter): Promise<DecaySummary[]> {
  return tx
    .select(summaryColumns)
    .from(decays)
    .innerJoin(rooms, eq(rooms.id, decays.roomId))
    .innerJoin(sensors, eq(sensors.id, decays.sensorId))
    .where(
      and(
        eq(decays.buildingId, filter.buildingId),
        isNull(decays.supersededAt),
        eq(decays.lead, true),
        gte(decays.night, filter.sinceNight),
        filter.show === 'all'
          ? undefined
          : filter.show === 'to review'
            ? and(eq(decays.quality, 'doubtful'), undecided)
            : eq(decays.quality, filter.show),
        filter.roomPublicId ? eq(rooms.publicId, filter.roomPublicId) : undefined,
        filter.mode ? eq(decays.mode, filter.mode) : undefined,
        filter.beforeS ? lt(decays.startAt, new Date(filter.beforeS * 1000)) : undefined,
      ),
    )
    .orderBy(desc(decays.startAt), asc(decays.id))
    .limit(filter.limit)
}

/** How many decays each choice of the filter holds. */
export async function countDecays(
  tx: Tx,
  { buildingId, sinceNight }: { buildingId: number; sinceNight: string },
): Promise<Record<'to review' | 'accepted' | 'doubtful' | 'refused', number>> {
  const [row] = await tx
    .select({
      'to review': sql<number>`count(*) FILTER (WHERE ${decays.quality} = 'doubtful' AND ${undecided})::int`,
      accepted: sql<number>`count(*) FILTER (WHERE ${decays.quality} = 'accepted')::int`,
      doubtful: sql<number>`count(*) FILTER (WHERE ${decays.quality} = 'doubtful')::int`,
      refused: sql<number>`count(*) FILTER (WHERE ${decays.quality} = 'refused')::int`,
    })
    .from(decays)
    .where(
      and(
        eq(decays.buildingId, buildingId),
        isNull(decays.supersededAt),
        eq(decays.lead, true),
        gte(decays.night, sinceNight),
      ),
    )
  return row ?? { 'to review': 0, accepted: 0, doubtful: 0, refused: 0 }
}

/** The other decays of this sensor nearest in time, to compare with: at most `limit`, same mode first. */
export async function listSiblings(
  tx: Tx,
  { decayId, limit }: { decayId: number; limit: number },
): Promise<DecaySummary[]> {
  const [own] = await tx.select().from(decays).where(eq(decays.id, decayId))
  if (!own) return []
  const days = 28 * 86_400_000
  return tx
    .select(summaryColumns)
    .from(decays)
    .innerJoin(rooms, eq(rooms.id, decays.roomId))
    .innerJoin(sensors, eq(sensors.id, decays.sensorId))
    .where(
      and(
        eq(decays.sensorId, own.sensorId),
        isNull(decays.supersededAt),
        ne(decays.id, own.id),
        ne(decays.quality, 'refused'),
        gte(decays.startAt, new Date(own.startAt.getTime() - days)),
        lte(decays.startAt, new Date(own.startAt.getTime() + days)),
      ),
    )
    .orderBy(
      sql`${decays.mode} <> ${own.mode}`,
      sql`abs(extract(epoch from ${decays.startAt} - ${own.startAt.toISOString()}::timestamptz))`,
    )
    .limit(limit)
}

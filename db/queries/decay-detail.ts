import { and, asc, desc, eq, gte, isNull, lte, sql } from 'drizzle-orm'
import type { DecayDetail, DecayReview } from '@/lib/wire/decays'
import type { Tx } from '../client'
import {
  airHandlers,
  buildings,
  decayReviews,
  decays,
  roomDesigns,
  rooms,
  roomWeeks,
  sensors,
  users,
} from '../schema'
import { listSiblings, summaryColumns } from './decays'

const beforeS = 90 * 60
const afterS = 120 * 60

/** One decay with everything its page shows, or undefined where there is none in scope. */
export async function getDecay(tx: Tx, { publicId }: { publicId: string }): Promise<DecayDetail | undefined> {
  const [row] = await tx
    .select({
      decay: decays,
      summary: summaryColumns,
      room: rooms,
      sensor: sensors,
      timeZone: buildings.timeZone,
      handlerAir: airHandlers.airSystem,
    })
    .from(decays)
    .innerJoin(rooms, eq(rooms.id, decays.roomId))
    .innerJoin(sensors, eq(sensors.id, decays.sensorId))
    .innerJoin(buildings, eq(buildings.id, decays.buildingId))
    .leftJoin(airHandlers, eq(airHandlers.id, rooms.airHandlerId))
    .where(eq(decays.publicId, publicId))
  if (!row) return undefined
  const { decay, summary, sensor } = row
  const design = await designOn(tx, decay.roomId, decay.night)
  const series = await seriesAround(tx, decay.sensorId, summary.startS - beforeS, summary.endS + afterS)
  const siblings = await listSiblings(tx, { decayId: decay.id, limit: 5 })
  const reviews = await reviewsOf(tx, decay.sensorId, decay.startAt, decay.endAt)
  const basisRate = await basisRateOf(tx, decay.roomId)
  const air = row.room.airSystem ?? row.handlerAir ?? 'unknown'
  return {
    ...summary,
    timeZone: row.timeZone,
    volumeM3: design?.volumeM3 ?? 0,
    designHeadcount: design?.designHeadcount ?? null,
    outdoorRateLow: decay.outdoorRateLowPerHour,
    outdoorRateHigh: decay.outdoorRateHighPerHour,
    isOutdoorAir: air === 'outdoor' || air === 'natural',
    background:
      decay.backgroundPpm === null
        ? null
        : {
            ppm: decay.backgroundPpm,
            standardUncertaintyPpm: decay.backgroundUncertaintyPpm ?? 0,
            origin: decay.backgroundOrigin ?? 'default',
          },
    startPpm: decay.startPpm,
    endPpm: decay.endPpm,
    meanAgeMin: decay.meanAgeMin,
    rateChangeS: seconds(decay.rateChangeAt),
    rateChangeLowS: seconds(decay.rateChangeLowAt),
    rateChangeHighS: seconds(decay.rateChangeHighAt),
    lastPersonLeftS: seconds(decay.lastPersonLeftAt),
    points: decay.points,
    lagOneCorrelation: decay.lagOneCorrelation,
    effectivePoints: decay.effectivePoints,
    residualSdPpm: decay.residualSdPpm,
    uncertaintyParts: decay.uncertaintyParts as DecayDetail['uncertaintyParts'],
    checks: decay.checks as DecayDetail['checks'],
    methodVersion: decay.methodVersion,
    createdS: decay.createdAt.getTime() / 1000,
    sensorSpec: {
      accuracyPpm: sensor.accuracyPpm ?? undefined,
      accuracyPct: sensor.accuracyPct ?? undefined,
      resolutionPpm: sensor.resolutionPpm ?? undefined,
      rangeMaxPpm: sensor.rangeMaxPpm ?? undefined,
      reporting: sensor.reporting,
      deadbandPpm: sensor.deadbandPpm ?? undefined,
    },
    intervalS: sensor.intervalS,
    series,
    siblings,
    reviews,
    basisRate,
  }
}

const seconds = (date: Date | null) => (date === null ? null : date.getTime() / 1000)

async function designOn(tx: Tx, roomId: number, night: string) {
  const [design] = await tx
    .select()
    .from(roomDesigns)
    .where(and(eq(roomDesigns.roomId, roomId), lte(roomDesigns.validFrom, night)))
    .orderBy(desc(roomDesigns.validFrom))
    .limit(1)
  return design
}

/** Readings that the person may see, as the sensor sent them. */
async function seriesAround(
  tx: Tx,
  sensorId: number,
  fromS: number,
  toS: number,
): Promise<DecayDetail['series']> {
  const result = await tx.execute<{ t: number; c: number }>(
    sql`SELECT extract(epoch from at)::double precision AS t, co2_ppm AS c FROM visible_readings
        WHERE sensor_id = ${sensorId} AND at BETWEEN to_timestamp(${fromS}) AND to_timestamp(${toS}) ORDER BY at`,
  )
  return { timeS: result.rows.map((row) => row.t), co2Ppm: result.rows.map((row) => row.c) }
}

async function reviewsOf(tx: Tx, sensorId: number, from: Date, to: Date): Promise<DecayReview[]> {
  const rows = await tx
    .select({ review: decayReviews, person: users.name })
    .from(decayReviews)
    .innerJoin(users, eq(users.id, decayReviews.createdBy))
    .where(
      and(eq(decayReviews.sensorId, sensorId), lte(decayReviews.fromAt, to), gte(decayReviews.toAt, from)),
    )
    .orderBy(asc(decayReviews.createdAt))
  return rows.map(({ review, person }) => ({
    decision: review.decision,
    reason: review.reason,
    person,
    atS: review.createdAt.getTime() / 1000,
    fromS: review.fromAt.getTime() / 1000,
    toS: review.toAt.getTime() / 1000,
    rate: review.airChangeRatePerHour,
    rateLow: review.airChangeRateLowPerHour,
    rateHigh: review.airChangeRateHighPerHour,
    dataChanged: review.dataChanged,
    withdrawn: review.withdrawnAt !== null,
  }))
}

/** The room's basis as a rate, 1/h, from its newest week. */
async function basisRateOf(tx: Tx, roomId: number): Promise<number | null> {
  const [week] = await tx
    .select()
    .from(roomWeeks)
    .where(eq(roomWeeks.roomId, roomId))
    .orderBy(desc(roomWeeks.weekStart))
    .limit(1)
  return week?.basisFlowLps ? (week.basisFlowLps * 3.6) / week.volumeM3 : null
}

/** The internal row of a decay in scope, for a change. */
export async function findDecayRow(tx: Tx, { publicId }: { publicId: string }) {
  const [row] = await tx
    .select()
    .from(decays)
    .where(and(eq(decays.publicId, publicId), isNull(decays.supersededAt)))
  return row
}

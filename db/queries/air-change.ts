import { and, asc, desc, eq, gte, inArray, isNull, sql } from 'drizzle-orm'
import type { Mode } from '@/lib/air/types'
import type { AirChangeRow } from '@/lib/wire/air-change'
import type { Tx } from '../client'
import {
  airHandlers,
  floors,
  rateChanges,
  roomDesigns,
  rooms,
  roomTenancies,
  roomWeeks,
  tenancies,
} from '../schema'

type RoomFacts = Awaited<ReturnType<typeof roomsOf>>[number]
type Week = typeof roomWeeks.$inferSelect

/**
 * Every room of a building with its figure in one mode: the newest week's 28-day verdict, up to `weeks` weekly rates (oldest first) and the
 * newest change. A naturally ventilated room stands in the table of `supply on`, for it has no supply to be on.
 */
export async function listAirChange(
  tx: Tx,
  { buildingId, mode, weeks }: { buildingId: number; mode: Mode; weeks: number },
): Promise<AirChangeRow[]> {
  const facts = await roomsOf(tx, buildingId)
  const modes = mode === 'supply on' ? ['supply on', 'natural'] : [mode]
  const weekRows = await weeksOf(tx, buildingId, modes, weeks)
  const changes = await changesOf(tx, buildingId, modes)
  const byRoom = new Map<number, Week[]>()
  for (const week of weekRows) byRoom.set(week.roomId, [...(byRoom.get(week.roomId) ?? []), week])
  return facts.map((room) => {
    const own = byRoom.get(room.id) ?? []
    const change = changes.find((each) => each.roomId === room.id)
    return rowOf(room, own, mode, change)
  })
}

function roomsOf(tx: Tx, buildingId: number) {
  const newestDesign = tx
    .selectDistinctOn([roomDesigns.roomId])
    .from(roomDesigns)
    .where(sql`${roomDesigns.validFrom} <= current_date`)
    .orderBy(roomDesigns.roomId, desc(roomDesigns.validFrom))
    .as('design')
  return tx
    .select({
      id: rooms.id,
      publicId: rooms.publicId,
      number: rooms.number,
      name: rooms.name,
      use: rooms.use,
      floor: floors.name,
      floorOrdinal: floors.ordinal,
      tenancy: tenancies.name,
      airHandler: airHandlers.name,
      volumeM3: newestDesign.volumeM3,
      floorAreaM2: newestDesign.floorAreaM2,
      designHeadcount: newestDesign.designHeadcount,
    })
    .from(rooms)
    .innerJoin(floors, eq(floors.id, rooms.floorId))
    .innerJoin(newestDesign, eq(newestDesign.roomId, rooms.id))
    .leftJoin(airHandlers, eq(airHandlers.id, rooms.airHandlerId))
    .leftJoin(roomTenancies, and(eq(roomTenancies.roomId, rooms.id), isNull(roomTenancies.toAt)))
    .leftJoin(tenancies, eq(tenancies.id, roomTenancies.tenancyId))
    .where(and(eq(rooms.buildingId, buildingId), eq(rooms.kind, 'room')))
    .orderBy(asc(floors.ordinal), asc(rooms.number))
}

/** The newest method version's weeks of these modes, oldest first. */
function weeksOf(tx: Tx, buildingId: number, modes: string[], weeks: number): Promise<Week[]> {
  return tx
    .selectDistinctOn([roomWeeks.roomId, roomWeeks.weekStart])
    .from(roomWeeks)
    .where(
      and(
        eq(roomWeeks.buildingId, buildingId),
        inArray(roomWeeks.mode, modes),
        gte(roomWeeks.weekStart, sql`(current_date - ${weeks * 7}::integer)`),
      ),
    )
    .orderBy(roomWeeks.roomId, roomWeeks.weekStart, desc(roomWeeks.computedAt))
}

function changesOf(tx: Tx, buildingId: number, modes: string[]) {
  return tx
    .selectDistinctOn([rateChanges.roomId])
    .from(rateChanges)
    .where(and(eq(rateChanges.buildingId, buildingId), inArray(rateChanges.mode, modes)))
    .orderBy(rateChanges.roomId, desc(rateChanges.onNight), desc(rateChanges.foundAt))
}

type Change = Awaited<ReturnType<typeof changesOf>>[number]

function rowOf(room: RoomFacts, weeks: Week[], mode: Mode, change: Change | undefined): AirChangeRow {
  const newest = weeks.at(-1)
  const flowLps = newest?.flowLps ?? null
  const basisFlowLps = newest?.basisFlowLps ?? null
  const rate = newest?.verdictRatePerHour ?? null
  return {
    roomId: room.publicId,
    number: room.number,
    name: room.name,
    floor: room.floor,
    floorOrdinal: room.floorOrdinal,
    tenancy: room.tenancy,
    airHandler: room.airHandler,
    use: room.use,
    mode: (newest?.mode as Mode | undefined) ?? mode,
    modeFrom: newest?.modeFrom ?? null,
    rate,
    rateLow: newest?.verdictRateLowPerHour ?? null,
    rateHigh: newest?.verdictRateHighPerHour ?? null,
    days: newest?.verdictDays ?? 0,
    decays: newest?.verdictDecays ?? 0,
    isDilutionRate: newest?.isDilutionRate ?? false,
    meanAgeMin: rate === null ? null : 60 / rate,
    flowLps,
    flowLowLps: newest?.flowLowLps ?? null,
    flowHighLps: newest?.flowHighLps ?? null,
    basisName: newest?.basisName ?? null,
    basisFlowLps,
    basisRate: basisFlowLps === null ? null : (basisFlowLps * 3.6) / room.volumeM3,
    floorAreaM2: room.floorAreaM2,
    volumeM3: room.volumeM3,
    designHeadcount: room.designHeadcount,
    supportsPersons: newest?.supportsPersons ?? null,
    verdict: newest?.verdict ?? 'not proven',
    verdictSentence:
      newest?.verdictSentence ?? 'No decay of this room has been analysed yet, so there is no figure.',
    againstBasis: flowLps === null || !basisFlowLps ? null : flowLps / basisFlowLps - 1,
    weeks: weeks.map((week) => ({
      weekStart: week.weekStart,
      rate: week.airChangeRatePerHour,
      low: week.airChangeRateLowPerHour,
      high: week.airChangeRateHighPerHour,
      days: week.days,
    })),
    change: change
      ? { kind: change.kind, onNight: change.onNight, ratio: change.ratio, sentence: change.sentence }
      : null,
  }
}

import {
  getRoomVerdict,
  listRoomChanges,
  listRoomFindings,
  listRoomSensors,
  listRoomWeeks,
  type RoomIdentity,
} from '@/db/queries/rooms'
import { can } from '@/lib/policy/permissions'
import { addDays } from '@/lib/time'
import type { RoomDetail } from '@/lib/wire/rooms'
import type { SignedContext } from '../http/signed'

/** Half a year of weeks. */
const HISTORY_DAYS = 26 * 7

/**
 * What is known of a room beside its live value. Who may not read air-change figures (a tenant) gets the verdict in people and minutes
 * alone: no weekly rates, changes or findings; who may not see a single-person room's live value gets no reading of its sensors.
 */
export async function roomDetail(ctx: SignedContext, found: RoomIdentity, now: Date): Promise<RoomDetail> {
  const readsRates = can(ctx.membership.roles, 'air-change.read') || can(ctx.membership.roles, 'rounds.read')
  const roomId = found.id
  const hidden = found.room.singlePerson && ctx.scope.hidesSinglePerson
  const sinceWeek = addDays(now.toISOString().slice(0, 10), -HISTORY_DAYS)
  return ctx.read(async (tx) => ({
    room: found.room,
    verdict: await getRoomVerdict(tx, { roomId }),
    weeks: readsRates ? await listRoomWeeks(tx, { roomId, sinceWeek }) : [],
    changes: readsRates ? await listRoomChanges(tx, { roomId }) : [],
    findings: readsRates ? await listRoomFindings(tx, { roomId, airHandlerId: found.airHandlerId }) : [],
    sensors: hidden ? [] : await listRoomSensors(tx, { roomId, nowS: now.getTime() / 1000 }),
  }))
}

import { listClosures } from '@/db/queries/closures'
import { readRoomSeries } from '@/db/queries/readings'
import { listRoomDecays, readSupply } from '@/db/queries/room-record'
import type { RoomIdentity } from '@/db/queries/rooms'
import { supplySpans } from '@/lib/format/supply-spans'
import type { SignedContext } from '../http/signed'

/** CO2, decays and supply hours of a room between two instants, in at most `points` points. */
export async function roomRecord(
  ctx: SignedContext,
  found: RoomIdentity,
  { fromS, toS, points }: { fromS: number; toS: number; points: number },
) {
  const { id: roomId, buildingId, airHandlerId, timeZone } = found
  return ctx.read(async (tx) => {
    const series = await readRoomSeries(tx, { roomId, buildingId, fromS, toS, points })
    const decays = await listRoomDecays(tx, { roomId, fromS, toS })
    if (airHandlerId === null) return { series, decays, supply: [] }
    const record = await readSupply(tx, { airHandlerId, fromS, toS })
    const closures = await listClosures(tx, { buildingId })
    return { series, decays, supply: supplySpans({ ...record, closures }, fromS, toS, timeZone) }
  })
}

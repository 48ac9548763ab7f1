import { getRoom, type RoomIdentity } from '@/db/queries/rooms'
import { Refusal } from '@/lib/errors'
import type { SignedContext } from './signed'

/** The room a request names by its public id; refuses what is not there or not theirs, in the same words. */
export async function requireRoom(ctx: SignedContext, publicId: string): Promise<RoomIdentity> {
  const found = await ctx.read((tx) => getRoom(tx, { publicId }))
  if (!found) throw new Refusal('not-found', 'There is no such room here, or it is not yours to see.')
  return found
}

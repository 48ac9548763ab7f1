import { type BuildingSummary, listBuildingsInScope } from '@/db/queries/people'
import { Refusal } from '@/lib/errors'
import type { SignedContext } from './signed'

/** The building a request names by slug, or the only one in scope; refuses what is not there or not theirs, in the same words. */
export async function requireBuilding(
  ctx: SignedContext,
  slug: string | undefined,
): Promise<BuildingSummary> {
  const buildings = await ctx.read(listBuildingsInScope)
  if (slug === undefined && buildings.length > 1) {
    throw new Refusal(
      'bad-request',
      `Name one of your buildings: ?building=${buildings.map((each) => each.slug).join(' or ')}.`,
    )
  }
  const building = slug === undefined ? buildings[0] : buildings.find((each) => each.slug === slug)
  if (!building) throw new Refusal('not-found', 'There is no such building here, or it is not yours to see.')
  return building
}

/** Notices that tell open screens what changed; never rows (PostgreSQL aborts a transaction over 8000 bytes of NOTIFY). */
import { z } from 'zod'

/** The one NOTIFY channel of the deployment. */
export const LIVE_CHANNEL = 'ebbmark_live'

/** A notice names at most this many buildings; beyond, it says "many". */
export const LIVE_BUILDINGS_MAX = 50

const kind = z.string().regex(/^[a-z][a-z-]{0,39}$/)

/** `kind` is open, so that an older process passes by what it does not know: "readings", "sensors", "night", "session", … */
export const liveNoticeSchema = z.object({
  v: z.literal(1),
  kind,
  buildings: z.union([z.literal('many'), z.array(z.number().int().positive()).max(LIVE_BUILDINGS_MAX)]),
})

export type LiveNotice = z.infer<typeof liveNoticeSchema>

/** The notice for a set of buildings: their ids in order, or "many" where there are more than 50. */
export function liveNotice(kindOfChange: string, buildingIds: Iterable<number>): LiveNotice {
  const ids = [...new Set(buildingIds)].sort((a, b) => a - b)
  return { v: 1, kind: kindOfChange, buildings: ids.length > LIVE_BUILDINGS_MAX ? 'many' : ids }
}

/** Reads a NOTIFY payload; undefined where it is not a notice of this version. */
export function parseLiveNotice(payload: string | undefined): LiveNotice | undefined {
  if (payload === undefined) return undefined
  try {
    const parsed = liveNoticeSchema.safeParse(JSON.parse(payload))
    return parsed.success ? parsed.data : undefined
  } catch {
    return undefined
  }
}

/** True where the notice may concern the building. */
export function concernsBuilding(notice: LiveNotice, buildingId: number): boolean {
  return notice.buildings === 'many' || notice.buildings.includes(buildingId)
}

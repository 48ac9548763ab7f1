import { storeDigest } from '@/db/changes/digests'
import type { Database } from '@/db/client'
import { tenanciesWithoutDigest } from '@/db/queries/digests'
import type { Clock } from '../clock'
import { buildDigest } from './build'
import { weekMaterial } from './material'

export type WriteDigests = {
  database: Database
  clock: Clock
  buildingId: number
  /** Monday of a week whose nights are judged */
  weekStart: string
  /** false for weeks long past: their digests are pages only */
  mails: boolean
}

/** Writes the digests that a building's week still lacks, each with its queued mail in one transaction. None while a night of it is missing. Returns their public ids. */
export async function writeDigests(options: WriteDigests): Promise<string[]> {
  const { database, clock, buildingId, weekStart, mails } = options
  return database.asSystem('write digests', async (tx) => {
    const missing = await tenanciesWithoutDigest(tx, { buildingId, weekStart })
    if (missing.length === 0) return []
    const material = await weekMaterial(tx, { buildingId, weekStart })
    // a letter about a week of which nights are missing would claim too much
    if (material.runs.length < 7) return []
    const written: string[] = []
    for (const tenancy of missing) {
      const content = buildDigest(material, tenancy)
      if (!content) continue
      const { organizationId, id: tenancyId } = tenancy
      const publicId = await storeDigest(tx, {
        ...{ organizationId, buildingId, tenancyId, weekStart, content },
        receivers: mails ? tenancy.digestEmails : [],
        now: clock.now(),
      })
      if (publicId) written.push(publicId)
    }
    return written
  })
}

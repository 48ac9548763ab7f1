import path from 'node:path'
import { deleteOldReadings, deleteOldRollups, detachMonth, dropDetachedMonth } from '@/db/changes/retention'
import type { Database } from '@/db/client'
import { type KeptBy, listOrganizationsKept, listReadingsMonths } from '@/db/queries/retention'
import type { Clock } from '@/lib/server/clock'
import { archiveMonth } from './archive'
import { type Defaults, keptSince, longestKept, rollupsKept } from './policy'

export type RetainOptions = {
  database: Database
  clock: Clock
  defaults: Defaults
  /** months that nobody keeps go to a file here before they are dropped; null drops them without */
  archiveDir: string | null
  stopped?: () => boolean
  /** rows of one transaction, and transactions of one organisation in one run: what is left waits for the next night */
  batchRows?: number
  mostBatches?: number
}

export type Retained = { readings: number; rollups: number; months: string[] }

/**
 * Lets go of what is kept no longer: an organisation's readings and roll-ups past its own period in batches, whole months past the longest
 * period of the deployment. What is not rolled up yet stays. Each step is a transaction of its own with its line in the audit
 * trail; safe to run twice and to end at any moment.
 */
export async function retain(options: RetainOptions): Promise<Retained> {
  const { database, defaults, stopped } = options
  const now = options.clock.now()
  const organizations = await database.asSystem('retention', (tx) => listOrganizationsKept(tx))
  const done: Retained = { readings: 0, rollups: 0, months: [] }
  for (const own of organizations) {
    if (stopped?.()) return done
    const readingsBefore = rolledBefore(keptSince(now, own.readingsKeptDays), own)
    if (readingsBefore) done.readings += await inBatches(options, own, readingsBefore, deleteOldReadings)
    const rollupsBefore = keptSince(now, rollupsKept(own, defaults))
    if (rollupsBefore) done.rollups += await inBatches(options, own, rollupsBefore, deleteOldRollups)
  }
  const before = keptSince(now, longestKept(organizations, defaults))
  if (before) await detachBefore(options, organizations, before)
  done.months = await letDetachedGo(options)
  return done
}

/** The earlier of the two: the end of the period, and how far roll-ups of the readings exist. Null where nothing may go. */
function rolledBefore(before: Date | null, { rolledToS }: Pick<KeptBy, 'rolledToS'>): Date | null {
  if (before === null || rolledToS === null) return null
  return rolledToS * 1000 < before.getTime() ? new Date(rolledToS * 1000) : before
}

async function inBatches(
  { database, stopped, batchRows = 20_000, mostBatches = 200 }: RetainOptions,
  own: KeptBy,
  before: Date,
  deleteOld: typeof deleteOldReadings,
): Promise<number> {
  const batch = {
    organizationId: own.id,
    organizationPublicId: own.publicId,
    ...{ before, atMost: batchRows },
  }
  let total = 0
  for (let count = 0; count < mostBatches && !stopped?.(); count++) {
    const gone = await database.asSystem('retention', (tx) => deleteOld(tx, batch))
    total += gone
    if (gone < batchRows) break
  }
  return total
}

async function detachBefore(
  { database }: RetainOptions,
  organizations: readonly KeptBy[],
  before: Date,
): Promise<void> {
  const months = await database.asSystem('retention', (tx) => listReadingsMonths(tx))
  for (const { partition, untilAt, attached } of months) {
    const isRolled = organizations.every(
      ({ rolledToS }) => rolledToS !== null && rolledToS * 1000 >= untilAt.getTime(),
    )
    if (attached && untilAt <= before && isRolled)
      await database.asSystem('retention', (tx) => detachMonth(tx, { partition }))
  }
}

/** Archives and drops every detached month, also those that an ended run left. */
async function letDetachedGo({ database, archiveDir, stopped }: RetainOptions): Promise<string[]> {
  const months = await database.asSystem('retention', (tx) => listReadingsMonths(tx))
  const gone: string[] = []
  for (const { partition, attached } of months) {
    if (attached || stopped?.()) continue
    const file = archiveDir === null ? null : await archiveMonth(database, archiveDir, partition)
    await database.asSystem('retention', (tx) => dropDetachedMonth(tx, { partition, file }))
    gone.push(partition.slice(-7).replace('_', '-'))
  }
  return gone
}

/** Where the archive of a data folder lies. */
export const archiveDirOf = (dataDir: string) => path.join(dataDir, 'archive')

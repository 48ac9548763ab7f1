import { sql } from 'drizzle-orm'
import type { Tx } from '../client'
import { addAuditEvent } from './audit'

type Batch = { organizationId: number; organizationPublicId: string; before: Date; atMost: number }

/**
 * Deletes readings of an organisation from before an instant, `atMost` of them, with a line in the audit trail; says how many went.
 * Throws PostgreSQL's 42501 where the organisation's own period does not allow it.
 */
export async function deleteOldReadings(tx: Tx, batch: Batch): Promise<number> {
  const { organizationId, before, atMost } = batch
  const { rows } = await tx.execute<{ gone: number }>(
    sql`SELECT delete_old_readings(${organizationId}, ${before}, ${atMost}) AS gone`,
  )
  const gone = rows[0]?.gone ?? 0
  await tellOf(tx, 'readings.deleted', batch, gone)
  return gone
}

/** Deletes roll-ups of an organisation from before an instant, `atMost` of them, as deleteOldReadings does with readings. */
export async function deleteOldRollups(tx: Tx, batch: Batch): Promise<number> {
  const { organizationId, before, atMost } = batch
  const { rows } = await tx.execute<{ gone: number }>(
    sql`SELECT delete_old_rollups(${organizationId}, ${before}, ${atMost}) AS gone`,
  )
  const gone = rows[0]?.gone ?? 0
  await tellOf(tx, 'rollups.deleted', batch, gone)
  return gone
}

async function tellOf(tx: Tx, action: string, batch: Batch, rows: number): Promise<void> {
  if (rows === 0) return
  await addAuditEvent(tx, {
    organizationId: batch.organizationId,
    userId: null,
    action,
    subjectKind: 'organization',
    subjectId: batch.organizationPublicId,
    detail: { rows, before: batch.before.toISOString(), reason: 'kept for no longer' },
  })
}

/** Takes a month off the table of readings; returns the name it then has. Waits 2 s at most for readers to end, else throws 55P03. */
export async function detachMonth(tx: Tx, { partition }: { partition: string }): Promise<string> {
  const { rows } = await tx.execute<{ apart: string }>(
    sql`SELECT detach_readings_month(${partition}) AS apart`,
  )
  return rows[0]!.apart
}

/**
 * Drops a detached month and tells every organisation that had readings in it. `file`: name of its archive, null where none is wanted.
 */
export async function dropDetachedMonth(
  tx: Tx,
  { partition, file }: { partition: string; file: string | null },
): Promise<void> {
  const month = partition.slice(-7).replace('_', '-')
  const { rows } = await tx.execute<{ id: number; rows: number }>(sql`
    SELECT s.organization_id AS id, count(*)::int AS rows FROM ${sql.identifier(partition)} r JOIN sensors s ON s.id = r.sensor_id GROUP BY 1 ORDER BY 1`)
  for (const { id: organizationId, rows: gone } of rows) {
    await addAuditEvent(tx, {
      ...{ organizationId, userId: null, action: 'readings.month-dropped' },
      ...{ subjectKind: 'readings-month', subjectId: month, detail: { rows: gone, archive: file } },
    })
  }
  await tx.execute(sql`SELECT drop_detached_month(${partition})`)
}

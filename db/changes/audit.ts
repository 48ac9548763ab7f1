import type { Tx } from '../client'
import { auditEvents } from '../schema'

/** One line of the audit trail: who did what to which thing, from what to what. Never a password, secret or reading in it. */
export type AuditEntry = {
  organizationId: number
  /** null where the program itself did it */
  userId: number | null
  /** verb and thing, e.g. `sensor.registered` */
  action: string
  subjectKind: string
  /** the public id, where the thing has one */
  subjectId: string
  detail: { from?: unknown; to?: unknown; reason?: string } & Record<string, unknown>
}

/** Adds to the audit trail, in the transaction of the change itself. */
export async function addAuditEvent(tx: Tx, entry: AuditEntry): Promise<void> {
  await tx.insert(auditEvents).values(entry)
}

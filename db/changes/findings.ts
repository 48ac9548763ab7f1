import { inArray } from 'drizzle-orm'
import { canonicalJson } from '../canonical-json'
import type { Tx } from '../client'
import { newPublicId } from '../public-id'
import { findingRows } from '../queries/weeks'
import { findings } from '../schema'

export type FindingKind = (typeof findings.$inferSelect)['kind']
export type NewFinding = Omit<typeof findings.$inferInsert, 'id' | 'publicId' | 'createdAt' | 'detail'> & {
  detail: Record<string, unknown>
}

const contentOf = (row: object) => {
  const own = ['id', 'publicId', 'createdAt']
  return canonicalJson(Object.fromEntries(Object.entries(row).filter(([name]) => !own.includes(name))))
}

/**
 * Makes the table hold what is found now of some kinds: one that stood keeps its row, address and date; one that no longer holds goes.
 * Returns how many rows changed.
 */
export async function storeFindings(
  tx: Tx,
  found: {
    buildingId: number
    methodVersion: string
    kinds: readonly FindingKind[]
    findings: readonly NewFinding[]
    now: Date
  },
): Promise<number> {
  const standing = (await findingRows(tx, found)).filter((row) => found.kinds.includes(row.kind))
  const keyOf = (row: { kind: string; subjectKey: string }) => `${row.kind} ${row.subjectKey}`
  const before = new Map(standing.map((row) => [keyOf(row), row]))
  const changed = found.findings.filter((one) => {
    const known = before.get(keyOf(one))
    return !known || contentOf(known) !== contentOf(one)
  })
  const wanted = new Set(found.findings.map(keyOf))
  const gone = standing.filter((row) => !wanted.has(keyOf(row)))
  const replaced = changed.flatMap((one) => before.get(keyOf(one)) ?? [])
  const ids = [...gone, ...replaced].map((row) => row.id)
  if (ids.length > 0) await tx.delete(findings).where(inArray(findings.id, ids))
  if (changed.length > 0) {
    await tx.insert(findings).values(
      changed.map((one) => {
        const known = before.get(keyOf(one))
        return {
          ...one,
          publicId: known?.publicId ?? newPublicId(),
          createdAt: known?.createdAt ?? found.now,
        }
      }),
    )
  }
  return changed.length + gone.length
}

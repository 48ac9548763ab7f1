import { inArray } from 'drizzle-orm'
import { canonicalJson } from '../canonical-json'
import type { Tx } from '../client'
import { rateChangeRows, weekRows } from '../queries/weeks'
import { rateChanges, roomWeeks } from '../schema'

export type NewRoomWeek = Omit<typeof roomWeeks.$inferInsert, 'id' | 'computedAt'>
export type NewRateChange = Omit<typeof rateChanges.$inferInsert, 'id' | 'foundAt'>

const without = (row: object, names: readonly string[]) =>
  canonicalJson(Object.fromEntries(Object.entries(row).filter(([name]) => !names.includes(name))))

/**
 * Writes the rows of some rooms' week: those that came out as they stood are left alone, so that judging twice changes nothing; modes that
 * no longer have anything to say are removed. Returns how many rows changed.
 */
export async function storeRoomWeeks(
  tx: Tx,
  week: {
    buildingId: number
    weekStart: string
    methodVersion: string
    roomIds: readonly number[]
    rows: readonly NewRoomWeek[]
    now: Date
  },
): Promise<number> {
  const standing = await weekRows(tx, week)
  const keyOf = (row: NewRoomWeek) => `${row.roomId} ${row.mode}`
  const before = new Map(standing.map((row) => [keyOf(row), row]))
  const own = ['id', 'computedAt']
  const changed = week.rows.filter((row) => {
    const known = before.get(keyOf(row))
    return !known || without(known, own) !== without(row, own)
  })
  const wanted = new Set(week.rows.map(keyOf))
  const gone = standing.filter((row) => !wanted.has(keyOf(row))).map((row) => row.id)
  const replaced = changed.flatMap((row) => before.get(keyOf(row))?.id ?? [])
  if (gone.length + replaced.length > 0)
    await tx.delete(roomWeeks).where(inArray(roomWeeks.id, [...gone, ...replaced]))
  if (changed.length > 0)
    await tx.insert(roomWeeks).values(changed.map((row) => ({ ...row, computedAt: week.now })))
  return changed.length + gone.length
}

/** Writes the changes that a building's rooms show now; one that stood keeps its row and the time it was found. Returns how many rows changed. */
export async function storeRateChanges(
  tx: Tx,
  found: { buildingId: number; methodVersion: string; changes: readonly NewRateChange[]; now: Date },
): Promise<number> {
  const standing = await rateChangeRows(tx, found)
  const own = ['id', 'foundAt']
  const before = new Map(standing.map((row) => [without(row, own), row]))
  const added = found.changes.filter((change) => !before.delete(without(change, own)))
  const gone = [...before.values()]
  const goneIds = gone.map((row) => row.id)
  if (goneIds.length > 0) await tx.delete(rateChanges).where(inArray(rateChanges.id, goneIds))
  const firstFound = (change: NewRateChange) =>
    gone.find((row) => row.roomId === change.roomId && row.mode === change.mode && row.kind === change.kind)
      ?.foundAt ?? found.now
  if (added.length > 0)
    await tx.insert(rateChanges).values(added.map((change) => ({ ...change, foundAt: firstFound(change) })))
  return added.length + gone.length
}

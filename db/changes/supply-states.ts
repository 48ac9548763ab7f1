import type pg from 'pg'
import { markLateHours } from './late-readings'
import { LATE_AFTER_MS } from './readings'

/** A state of an air handler's supply from `atMs` (epoch milliseconds) on. */
export type SupplyStateRow = {
  organizationId: number
  buildingId: number
  airHandlerId: number
  atMs: number
  receivedMs: number
  state: 'on' | 'reduced' | 'off'
  outdoorFraction: number | null
  supplyLps: number | null
}

/**
 * Stores supply states in the running transaction: the first of an air handler and instant stays, equal ones are harmless, others come
 * back as conflicts. Hours with late ones are marked as for readings.
 */
export async function storeSupplyStates<Row extends SupplyStateRow>(
  client: pg.ClientBase,
  rows: readonly Row[],
): Promise<{ inserted: number; conflicts: Row[] }> {
  const late: Row[] = []
  const conflicts: Row[] = []
  let inserted = 0
  // a gateway speaks a few times a day: one statement each is plenty
  for (const row of rows) {
    const values = [row.airHandlerId, row.atMs / 1000, row.state, row.outdoorFraction, row.supplyLps]
    const added = await client.query(
      `INSERT INTO supply_states (organization_id, building_id, air_handler_id, at, state, outdoor_fraction, supply_lps, received_at)
       VALUES ($6, $7, $1, to_timestamp($2::float8), $3, $4, $5, to_timestamp($8::float8)) ON CONFLICT (air_handler_id, at) DO NOTHING`,
      [...values, row.organizationId, row.buildingId, row.receivedMs / 1000],
    )
    if (added.rowCount === 1) {
      inserted++
      if (row.receivedMs - row.atMs > LATE_AFTER_MS) late.push(row)
      continue
    }
    const same = await client.query(
      `SELECT FROM supply_states WHERE air_handler_id = $1 AND at = to_timestamp($2::float8) AND state = $3
         AND outdoor_fraction IS NOT DISTINCT FROM $4::float8 AND supply_lps IS NOT DISTINCT FROM $5::float8`,
      values,
    )
    if (same.rowCount === 0) conflicts.push(row)
  }
  await markLateHours(client, late)
  return { inserted, conflicts }
}

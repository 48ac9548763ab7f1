import { sql } from 'drizzle-orm'
import type { Tx } from '../client'

/** Makes the partitions of readings from the month of `now` to `months` later, where they are missing. */
export async function makeReadingsMonths(
  tx: Tx,
  { now, months }: { now: Date; months: number },
): Promise<void> {
  await tx.execute(
    sql`SELECT ensure_readings_month(${now}::timestamptz + make_interval(months => ahead)) FROM generate_series(0, ${months}::int) AS ahead`,
  )
}

import { Readable } from 'node:stream'
import { pipeline } from 'node:stream/promises'
import pg from 'pg'
import { from as copyFrom } from 'pg-copy-streams'
import { ensureReadingsMonths, type ReadingRow, storeReadings } from '@/db/changes/readings'

/** Rows a second of one connection that inserts without a broker, each batch committed. */
export type Raw = { name: string; rowsPerS: number }

function rowsFrom(first: number, count: number, sensorIds: readonly number[], baseMs: number): ReadingRow[] {
  return Array.from({ length: count }, (_, index) => ({
    sensorId: sensorIds[(first + index) % sensorIds.length]!,
    buildingId: 1,
    atMs: baseMs + Math.floor((first + index) / sensorIds.length),
    receivedMs: baseMs + 60_000,
    co2Ppm: 420 + (index % 900),
    tempC: 21.4,
    rhPct: 38,
    batteryPct: null,
    rssiDbm: null,
    marked: false,
  }))
}

async function timed(seconds: number, batch: number, run: (first: number) => Promise<void>): Promise<number> {
  const startedMs = performance.now()
  let rows = 0
  while (performance.now() - startedMs < seconds * 1000) {
    await run(rows)
    rows += batch
  }
  return rows / ((performance.now() - startedMs) / 1000)
}

/** The ingest's own statements in batches, and COPY straight into readings (which can neither skip duplicates nor refuse conflicts). */
export async function rawInserts(options: {
  url: string
  superuserUrl: string
  seconds: number
  sensorIds: readonly number[]
  baseMs: number
}): Promise<Raw[]> {
  const client = new pg.Client({ connectionString: options.url })
  await client.connect()
  const raw: Raw[] = []
  try {
    await client.query(`SELECT set_config('ebb.system', 'bench', false)`)
    await ensureReadingsMonths(client, [options.baseMs])
    let baseMs = options.baseMs
    for (const batch of [1, 1000, 5000]) {
      baseMs += 1_000_000
      const rowsPerS = await timed(options.seconds, batch, async (first) => {
        await client.query('BEGIN')
        await storeReadings(client, rowsFrom(first, batch, options.sensorIds, baseMs))
        await client.query('COMMIT')
      })
      raw.push({
        name: batch === 1 ? 'one row per transaction' : `unnest, ${batch} rows a transaction`,
        rowsPerS,
      })
    }
    baseMs += 1_000_000
    raw.push({ name: 'COPY, 5000 rows a transaction', rowsPerS: await copyRows({ ...options, baseMs }) })
  } finally {
    await client.end()
  }
  return raw
}

/** COPY by the table's owner, for PostgreSQL does not COPY into a table with row-level security. */
async function copyRows(options: {
  superuserUrl: string
  seconds: number
  sensorIds: readonly number[]
  baseMs: number
}): Promise<number> {
  const client = new pg.Client({ connectionString: options.superuserUrl })
  await client.connect()
  try {
    return await timed(options.seconds, 5000, async (first) => {
      const lines = rowsFrom(first, 5000, options.sensorIds, options.baseMs).map(
        (row) =>
          `${row.sensorId}\t${new Date(row.atMs).toISOString()}\t${row.co2Ppm}\t${row.tempC}\t${row.rhPct}\n`,
      )
      const copy = client.query(copyFrom('COPY readings (sensor_id, at, co2_ppm, temp_c, rh_pct) FROM STDIN'))
      await pipeline(Readable.from([lines.join('')]), copy)
    })
  } finally {
    await client.end()
  }
}

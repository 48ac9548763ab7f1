import { createGzip } from 'node:zlib'
import type pg from 'pg'
import { to as copyTo } from 'pg-copy-streams'

export type Space = {
  readings: number
  heap: number
  index: number
  rollupHeap: number
  rollupIndex: number
}
export type Shape = { name: string; heap: number; index: number }

const number = async (client: pg.Client, text: string): Promise<number> =>
  Number((await client.query<{ v: string }>(text)).rows[0]!.v)

const partitionsSize = (of: string, measure: string) =>
  `SELECT sum(${measure}(inhrelid))::float8 AS v FROM pg_inherits WHERE inhparent = '${of}'::regclass`

/** Bytes per reading of the record and of its roll-ups, from the files' sizes. */
export async function spaceOf(client: pg.Client): Promise<Space> {
  const readings = await number(client, 'SELECT count(*) AS v FROM readings')
  const per = async (of: string, measure: string) =>
    (await number(client, partitionsSize(of, measure))) / readings
  return {
    readings,
    heap: await per('readings', 'pg_table_size'),
    index: await per('readings', 'pg_indexes_size'),
    rollupHeap: await per('reading_rollups', 'pg_table_size'),
    rollupIndex: await per('reading_rollups', 'pg_indexes_size'),
  }
}

/** The month with the most readings. */
const largestMonth = async (client: pg.Client): Promise<string> =>
  (
    await client.query<{ name: string }>(
      `SELECT inhrelid::regclass::text AS name FROM pg_inherits WHERE inhparent = 'readings'::regclass ORDER BY pg_table_size(inhrelid) DESC LIMIT 1`,
    )
  ).rows[0]!.name

/** Other ways to lay out the same month, in the order of arrival, each with the index that it needs. */
const others: readonly { name: string; columns: string; values: string; index: string }[] = [
  {
    name: 'sensor first (as it was)',
    columns:
      'sensor_id int, at timestamptz, received_at timestamptz, co2_ppm real, temp_c real, rh_pct real, import_id int, battery_pct smallint, rssi_dbm smallint, marked smallint',
    values: 'sensor_id, at, received_at, co2_ppm, temp_c, rh_pct, import_id, battery_pct, rssi_dbm, marked',
    index: 'PRIMARY KEY (sensor_id, at)',
  },
  {
    name: 'widest first (as it is)',
    columns:
      'at timestamptz, received_at timestamptz, sensor_id int, co2_ppm real, temp_c real, rh_pct real, import_id int, battery_pct smallint, rssi_dbm smallint, marked smallint',
    values: 'at, received_at, sensor_id, co2_ppm, temp_c, rh_pct, import_id, battery_pct, rssi_dbm, marked',
    index: 'PRIMARY KEY (sensor_id, at)',
  },
  {
    name: 'arrival as ms after, no mark, no upload',
    columns:
      'at timestamptz, sensor_id int, after_ms int, co2_ppm real, temp_c real, rh_pct real, battery_pct smallint, rssi_dbm smallint',
    values: `at, sensor_id, (extract(epoch FROM received_at - at) * 1000)::int, co2_ppm, temp_c, rh_pct, battery_pct, rssi_dbm`,
    index: 'PRIMARY KEY (sensor_id, at)',
  },
  {
    name: 'CO2 and instant alone',
    columns: 'at timestamptz, sensor_id int, co2_ppm real',
    values: 'at, sensor_id, co2_ppm',
    index: 'PRIMARY KEY (sensor_id, at)',
  },
]

/** Bytes per reading of a month in each layout. */
export async function layouts(client: pg.Client): Promise<Shape[]> {
  const month = await largestMonth(client)
  const rows = await number(client, `SELECT count(*) AS v FROM ${month}`)
  const shapes: Shape[] = []
  const measure = async (name: string, table: string) =>
    shapes.push({
      name,
      heap: (await number(client, `SELECT pg_table_size('${table}') AS v`)) / rows,
      index: (await number(client, `SELECT pg_indexes_size('${table}') AS v`)) / rows,
    })
  for (const { name, columns, values, index } of others) {
    await client.query(`CREATE TABLE shape (${columns}, ${index})`)
    await client.query(`INSERT INTO shape SELECT ${values} FROM ${month} ORDER BY at, sensor_id`)
    await measure(name, 'shape')
    await client.query('DROP TABLE shape')
  }
  await client.query(`CREATE TABLE shape (LIKE ${month})`)
  await client.query(`INSERT INTO shape SELECT * FROM ${month} ORDER BY at, sensor_id`)
  await client.query('CREATE INDEX ON shape USING brin (at)')
  await measure('as it is, BRIN on the instant in place of the key', 'shape')
  await client.query('DROP TABLE shape')
  await client.query(`REINDEX TABLE ${month}`)
  await measure('as it is, the key of a closed month rebuilt', month)
  return shapes
}

/** Bytes per reading of the month as compressed CSV. */
export async function archivedBytes(client: pg.Client): Promise<number> {
  const month = await largestMonth(client)
  const rows = await number(client, `SELECT count(*) AS v FROM ${month}`)
  const gzip = createGzip()
  let bytes = 0
  gzip.on('data', (chunk: Buffer) => {
    bytes += chunk.length
  })
  const stream = client.query(
    copyTo(`COPY (SELECT * FROM ${month} ORDER BY sensor_id, at) TO STDOUT WITH (FORMAT csv, HEADER)`),
  )
  await new Promise((resolve, reject) => {
    gzip.on('end', resolve)
    stream.on('error', reject)
    stream.pipe(gzip)
  })
  return bytes / rows
}

import { cpus } from 'node:os'
import pg from 'pg'
import { type Database, openDatabase } from '@/db/client'
import { migrateDatabase } from '@/db/migrate'
import { readRoomSeries } from '@/db/queries/readings'
import { rollUp } from '@/ingest/nightly/roll-up'
import { startThrowAwayCluster } from '../support/cluster'
import { makeMeasuredBuilding } from '../support/measured-building'
import { options, printTable, wholeNumber, writeReport } from './report'
import { archivedBytes, layouts, spaceOf } from './rollups/space'
import { type Times, timesOf } from './rollups/times'

const chosen = options({ rooms: '20', days: '365', points: '1400', repeats: '7' })
const rooms = wholeNumber('rooms', chosen.rooms, 1)
const days = wholeNumber('days', chosen.days, 1)
const points = wholeNumber('points', chosen.points, 20)
const repeats = wholeNumber('repeats', chosen.repeats, 1)

const TO_S = Date.parse('2026-11-30T09:02:00Z') / 1000
const FROM_S = TO_S - days * 86_400

const cluster = await startThrowAwayCluster()
const at = (user: string) => `postgres://${user}@127.0.0.1:${cluster.port}/ebbmark`
const owner = new pg.Client({ connectionString: at('ebbmark_owner') })
const database = openDatabase({ url: at('ebbmark_app'), poolSize: 2 })
try {
  await owner.connect()
  await bench()
} finally {
  await owner.end()
  await database.close()
  await cluster.remove()
}

async function bench(): Promise<void> {
  await migrateDatabase(at('ebbmark_owner'), new Date(TO_S * 1000))
  console.log(
    `${cpus().length} × ${cpus()[0]?.model ?? 'unknown processor'}, Node ${process.version}, PostgreSQL with fsync off.`,
  )
  console.log(`${rooms} rooms, ${days} days of one reading a minute, charts of ${points} points at most.\n`)
  const building = await fill(database)
  const clock = { now: () => new Date(TO_S * 1000) }
  const seconds = async (fn: () => Promise<unknown>) => {
    const from = performance.now()
    await fn()
    return (performance.now() - from) / 1000
  }
  const historyS = await seconds(() => rollUp({ database, clock, readingsKeptDays: null }))
  await owner.query('VACUUM ANALYZE')
  const space = await spaceOf(owner)
  const charts = await measureCharts(building)
  const steady = await measureSteady()
  const shapes = await layouts(owner)
  const archive = await archivedBytes(owner)
  print({ historyS, space, charts, steady, shapes, archive })
  writeReport('rollups', {
    ...{ node: process.version, cores: cpus().length, rooms, days, points },
    ...{ historyS, space, charts, steady, shapes, archive },
  })
}

type Building = Awaited<ReturnType<typeof makeMeasuredBuilding>>

/** A year as it would have come in: in order of time, all sensors of a minute together, with every quantity that a sensor sends. */
async function fill(database: Database): Promise<Building> {
  const building = await makeMeasuredBuilding(database, {
    slug: 'bench',
    timeZone: 'Europe/Lisbon',
    rooms: Array.from({ length: rooms }, (_, index) => ({
      ...{ number: `r${index}`, name: `Room ${index}`, volumeM3: 75, rateOnPerHour: 3, rateOffPerHour: 0.4 },
      designHeadcount: 10,
    })),
  })
  await owner.query(
    `SELECT ensure_readings_month(m) FROM generate_series(date_trunc('month', to_timestamp($1), 'UTC'), to_timestamp($2), interval '1 month') m`,
    [FROM_S, TO_S],
  )
  const ids = building.rooms.map((room) => room.sensorId)
  for (let fromS = FROM_S; fromS < TO_S; fromS += 7 * 86_400) await fillWeek(ids, fromS)
  return building
}

function fillWeek(sensorIds: readonly number[], fromS: number) {
  return owner.query(
    `INSERT INTO readings (at, received_at, sensor_id, co2_ppm, temp_c, rh_pct, battery_pct, rssi_dbm)
     SELECT to_timestamp(t), to_timestamp(t + 0.8), s, (430 + 500 * greatest(0, sin(t * 2 * pi() / 86400 + s)) + 9 * random())::int, round((21 + random())::numeric, 1),
       (35 + 20 * random())::int, 91, -60 - (10 * random())::int
     FROM generate_series($1::bigint, $2::bigint, 60) AS t, unnest($3::int[]) AS s ON CONFLICT DO NOTHING`,
    [fromS, Math.min(TO_S, fromS + 7 * 86_400) - 60, sensorIds],
  )
}

/** Times of readRoomSeries over the whole record, as the route handler calls it: one room, and all one after the other. */
async function measureCharts(
  building: Building,
): Promise<{ one: Times; all: Times; raw: Times; most: number }> {
  const { buildingId } = building
  let most = 0
  const chart = (roomId: number, toS = TO_S) =>
    database.asSystem('bench', async (tx) => {
      const series = await readRoomSeries(tx, { roomId, buildingId, fromS: FROM_S, toS, points })
      most = Math.max(most, series.points.length)
    })
  const first = building.rooms[0]!.id
  const one = await timesOf(repeats, () => chart(first))
  const all = await timesOf(repeats, async () => {
    for (const room of building.rooms) await chart(room.id)
  })
  // the same chart without roll-ups: progress taken away, so every reading is read
  await owner.query('CREATE TABLE kept AS SELECT * FROM rollup_progress')
  await owner.query('DELETE FROM rollup_progress')
  const raw = await timesOf(Math.min(3, repeats), () => chart(first))
  await owner.query('INSERT INTO rollup_progress SELECT * FROM kept')
  await owner.query('DROP TABLE kept')
  return { one, all, raw, most }
}

/** The job every five minutes, with what came in since. */
function measureSteady(): Promise<Times> {
  let toS = TO_S
  return timesOf(repeats, async (stopwatch) => {
    await owner.query(
      `INSERT INTO readings (at, sensor_id, co2_ppm) SELECT to_timestamp($1 + 60 * m), s.id, 600 FROM sensors s, generate_series(0, 4) m ON CONFLICT DO NOTHING`,
      [toS],
    )
    toS += 300
    await stopwatch(() =>
      rollUp({ database, clock: { now: () => new Date(toS * 1000) }, readingsKeptDays: null }),
    )
  })
}

type Figures = {
  historyS: number
  space: Awaited<ReturnType<typeof spaceOf>>
  charts: Awaited<ReturnType<typeof measureCharts>>
  steady: Times
  shapes: Awaited<ReturnType<typeof layouts>>
  archive: number
}

function print({ historyS, space, charts, steady, shapes, archive }: Figures): void {
  const ms = (times: Times) => [times.medianMs.toFixed(1), times.worstMs.toFixed(1)]
  printTable(
    ['at the server', 'median ms', 'worst ms', 'wanted'],
    [
      [`chart of ${days} days, one room`, ...ms(charts.one), '≤ 150'],
      [`charts of ${days} days, ${rooms} rooms`, ...ms(charts.all), '≤ 500 (20 rooms)'],
      ['one room without roll-ups', ...ms(charts.raw), ''],
      [`roll-up of five minutes, ${rooms} sensors`, ...ms(steady), ''],
    ],
  )
  console.log(`\nmost points sent for a room: ${charts.most} (asked for at most ${points})`)
  console.log(
    `roll-up of the history: ${historyS.toFixed(1)} s, ${Math.round(space.readings / historyS)} readings/s\n`,
  )
  const bytes = (value: number) => value.toFixed(1)
  printTable(
    ['bytes per reading', 'heap', 'index', 'both'],
    [
      ['readings', bytes(space.heap), bytes(space.index), bytes(space.heap + space.index)],
      [
        'roll-ups of them',
        bytes(space.rollupHeap),
        bytes(space.rollupIndex),
        bytes(space.rollupHeap + space.rollupIndex),
      ],
      ['archived month (CSV, gzip)', '', '', bytes(archive)],
    ],
  )
  console.log('')
  printTable(
    ['the same month in other tables', 'heap', 'index', 'both'],
    shapes.map((shape) => [
      shape.name,
      bytes(shape.heap),
      bytes(shape.index),
      bytes(shape.heap + shape.index),
    ]),
  )
}

import fs from 'node:fs'
import os, { cpus } from 'node:os'
import path from 'node:path'
import pg from 'pg'
import { deleteOldReadings } from '@/db/changes/retention'
import { openDatabase } from '@/db/client'
import { migrateDatabase } from '@/db/migrate'
import { readRoomSeries } from '@/db/queries/readings'
import { listOrganizationsKept } from '@/db/queries/retention'
import { makeBackup } from '@/ingest/backup/make'
import { rollUp } from '@/ingest/nightly/roll-up'
import { startThrowAwayCluster } from '../support/cluster'
import type { MeasuredBuilding } from '../support/measured-building'
import { options, printTable, wholeNumber, writeReport } from './report'
import { fillRecord } from './rollups/fill'
import { archivedBytes, layouts, spaceOf } from './rollups/space'
import { type Times, timesOf } from './rollups/times'

const chosen = options({ rooms: '20', days: '365', points: '1400', repeats: '7' })
const rooms = wholeNumber('rooms', chosen.rooms, 1)
const days = wholeNumber('days', chosen.days, 1)
const points = wholeNumber('points', chosen.points, 20)
const repeats = wholeNumber('repeats', chosen.repeats, 1)

const BATCH_ROWS = 20_000
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
  const building = await fillRecord({ database, owner, rooms, fromS: FROM_S, toS: TO_S })
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
  const keeping = await measureKeeping()
  print({ historyS, space, charts, steady, shapes, archive, keeping })
  writeReport('rollups', {
    ...{ node: process.version, cores: cpus().length, rooms, days, points },
    ...{ historyS, space, charts, steady, shapes, archive, keeping },
  })
}

/** Times of readRoomSeries over the whole record, as the route handler calls it: one room, and all one after the other. */
async function measureCharts(
  building: MeasuredBuilding,
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

/** A backup of the whole, and batches of the retention job. */
async function measureKeeping() {
  const dataDir = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-bench-'))
  const out = path.join(dataDir, 'backup.tar')
  try {
    const from = performance.now()
    await makeBackup({ ownerUrl: at('ebbmark_owner'), dataDir, out, now: new Date(TO_S * 1000) })
    const backupS = (performance.now() - from) / 1000
    await owner.query('UPDATE organizations SET readings_kept_days = 30')
    const [own] = await database.asSystem('bench', (tx) => listOrganizationsKept(tx))
    const batch = {
      organizationId: own!.id,
      organizationPublicId: own!.publicId,
      before: new Date((FROM_S + Math.min(days / 2, 60) * 86_400) * 1000),
      atMost: BATCH_ROWS,
    }
    const remove = () => database.asSystem('bench', (tx) => deleteOldReadings(tx, batch))
    const deletes = days > 90 ? await timesOf(repeats, remove) : null
    return { backupS, backupBytes: fs.statSync(out).size, deletes }
  } finally {
    fs.rmSync(dataDir, { recursive: true, force: true })
  }
}

type Figures = {
  historyS: number
  space: Awaited<ReturnType<typeof spaceOf>>
  charts: Awaited<ReturnType<typeof measureCharts>>
  steady: Times
  shapes: Awaited<ReturnType<typeof layouts>>
  archive: number
  keeping: Awaited<ReturnType<typeof measureKeeping>>
}

function print({ historyS, space, charts, steady, shapes, archive, keeping }: Figures): void {
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
    `roll-up of the history: ${historyS.toFixed(1)} s, ${Math.round(space.readings / historyS)} readings/s`,
  )
  console.log(
    `backup: ${keeping.backupS.toFixed(1)} s, ${(keeping.backupBytes / 1e6).toFixed(0)} MB; ${BATCH_ROWS} readings deleted in ${keeping.deletes?.medianMs.toFixed(0) ?? '–'} ms\n`,
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
      ['backup with everything', '', '', bytes(keeping.backupBytes / space.readings)],
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

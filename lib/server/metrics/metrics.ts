import { Counter, collectDefaultMetrics, Gauge, Registry } from 'prom-client'
import { getLastReadingStored, listNewestNights } from '@/db/queries/health'
import {
  countFailedNights,
  countRefused,
  countStandings,
  type Heard,
  listHeartbeats,
  queueState,
  storeFigures,
} from '@/db/queries/metrics'
import { STANDINGS } from '@/lib/wire/sensors'
import { systemClock } from '../clock'
import { database } from '../database'
import { readDisk } from '../disk'
import { currentHealth, nightIsDone } from '../health'

const DAY_MS = 86_400_000
const STATES = ['waiting', 'later', 'running', 'failed'] as const

const holder = globalThis as unknown as { ebbmarkProcessMetrics?: Registry }

/** Memory, processor time, event loop and the like of this web process; one registry a process, also across hot reloads. */
function processRegistry(): Registry {
  if (!holder.ebbmarkProcessMetrics) {
    holder.ebbmarkProcessMetrics = new Registry()
    collectDefaultMetrics({ register: holder.ebbmarkProcessMetrics })
  }
  return holder.ebbmarkProcessMetrics
}

type Figures = Awaited<ReturnType<typeof readFigures>>

function readFigures(now: Date) {
  return database().asSystem('metrics', async (tx) => ({
    heard: await listHeartbeats(tx),
    refused: await countRefused(tx, { since: new Date(now.getTime() - DAY_MS) }),
    standings: await countStandings(tx, { now }),
    queue: await queueState(tx),
    store: await storeFigures(tx, { now }),
    nights: await listNewestNights(tx),
    failedNights: await countFailedNights(tx),
    lastReading: await getLastReadingStored(tx),
  }))
}

/**
 * Figures of the whole deployment in Prometheus' text format: numbers of the database and of the processes' heartbeats. Nothing in it
 * names an organisation, building, room, person or device. Without a database it still says so and what this process uses.
 */
export async function metricsText(): Promise<{ text: string; contentType: string }> {
  const now = systemClock.now()
  const register = new Registry()
  const gauge = gaugeOf(register)
  const health = await currentHealth()
  for (const [part, { well }] of Object.entries(health.parts))
    gauge('health', 'Is this part well: 1 or 0', well ? 1 : 0, { part })
  const disk = await readDisk()
  if (disk) {
    gauge('disk_free_bytes', 'Free space of the disk under the data folder', disk.freeBytes)
    gauge('disk_size_bytes', 'Size of the disk under the data folder', disk.totalBytes)
    gauge('disk_tight', 'Is it tight (1) or nearly full (2)', ['ample', 'tight', 'full'].indexOf(disk.state))
  }
  if (health.parts.database.well) {
    const figures = await readFigures(now)
    writeIngest(register, figures.heard)
    writeStore(register, figures, now)
    writeWork(register, figures, now)
  }
  const text = `${await register.metrics()}\n${await processRegistry().metrics()}`
  return { text, contentType: register.contentType }
}

/** Sets gauges by name; a name is registered at its first use. */
function gaugeOf(register: Registry) {
  return (name: string, help: string, value: number, labels: Record<string, string> = {}) => {
    const full = `ebbmark_${name}`
    const known = register.getSingleMetric(full) as Gauge | undefined
    const gauge =
      known ?? new Gauge({ name: full, help, labelNames: Object.keys(labels), registers: [register] })
    gauge.set(labels, value)
  }
}

const ingestCounters = {
  messages: 'Messages taken from devices',
  readings: 'Readings stored',
  supply: 'Supply states stored',
  refusals: 'Refusals recorded',
  batches: 'Batches committed',
  droppedMessages: 'Messages given back unacknowledged because the store was away',
} as const

/** Sums over the brokers and ingest workers that are heard of, since each one's start. */
function writeIngest(register: Registry, heard: readonly Heard[]): void {
  const gauge = gaugeOf(register)
  const ingest = heard.filter(({ kind }) => kind === 'broker' || kind === 'ingest')
  const sum = (name: string) => ingest.reduce((total, { info }) => total + (Number(info[name]) || 0), 0)
  const counter = (name: string, help: string, value: number) =>
    new Counter({ name: `ebbmark_ingest_${name}_total`, help, registers: [register] }).inc(value)
  for (const [name, help] of Object.entries(ingestCounters))
    counter(name === 'droppedMessages' ? 'dropped_messages' : name, help, sum(name))
  counter(
    'commit_seconds',
    'Time that the batches took to commit; by batches, the mean',
    sum('commitMs') / 1000,
  )
  gauge('ingest_waiting_rows', 'Rows that wait for the next batch', sum('queuedRows'))
  gauge('ingest_connections', 'Devices connected', sum('connections'))
  const most = (name: string) => Math.max(0, ...ingest.map(({ info }) => Number(info[name]) || 0))
  gauge('ingest_last_batch_rows', 'Rows of the last batch, the largest of all workers', most('lastBatchRows'))
  gauge(
    'ingest_last_commit_seconds',
    'Time of the last commit, the longest of all workers',
    most('lastBatchTookMs') / 1000,
  )
  gauge(
    'ingest_store_away',
    'Workers that cannot store',
    ingest.filter(({ info }) => info.storeAway === true).length,
  )
}

function writeStore(
  register: Registry,
  { store, refused, lastReading, standings }: Figures,
  now: Date,
): void {
  const gauge = gaugeOf(register)
  gauge('readings_stored', 'Readings in the table, as its statistics estimate', store.readings)
  gauge('readings_bytes', 'Size of the readings with their index', store.readingsBytes)
  gauge('rollups_bytes', 'Size of the roll-ups with their index', store.rollupsBytes)
  gauge('database_bytes', 'Size of the database', store.databaseBytes)
  gauge('readings_months', 'Months of readings, each a partition', store.months)
  gauge('rollup_late_hours', 'Hours marked to be rolled up again', store.rollupHours)
  if (store.rollupLagS !== null)
    gauge('rollup_lag_seconds', 'How far roll-ups are behind, the furthest building', store.rollupLagS)
  if (lastReading)
    gauge(
      'last_reading_age_seconds',
      'Since the newest reading was stored',
      (now.getTime() - lastReading.getTime()) / 1000,
    )
  for (const { reason, count } of refused)
    gauge('refused_last_day', 'Refused in the last 24 hours', count, { reason })
  for (const standing of STANDINGS)
    gauge('sensors', 'Sensors by standing', standings.get(standing) ?? 0, { standing })
}

function writeWork(register: Registry, { queue, nights, failedNights, heard }: Figures, now: Date): void {
  const gauge = gaugeOf(register)
  const late = nights.filter((night) => !nightIsDone(night, now)).length
  gauge('buildings', 'Buildings', nights.length)
  gauge('nights_done', 'Buildings that owe no night: the newest due one is analysed', nights.length - late)
  gauge('nights_late', 'Buildings whose newest due night is not analysed', late)
  gauge('nights_failed', 'Nights whose newest run failed', failedNights)
  for (const state of STATES) {
    const found = queue.find((each) => each.state === state)
    gauge('jobs', 'Jobs in the queue', found?.jobs ?? 0, { state })
  }
  const waiting = queue.find((each) => each.state === 'waiting')
  gauge(
    'jobs_oldest_waiting_seconds',
    'How long the oldest job has been due',
    Math.max(0, waiting?.oldestS ?? 0),
  )
  for (const kind of new Set(heard.map((each) => each.kind))) {
    const same = heard.filter((each) => each.kind === kind)
    const newest = Math.max(...same.map((each) => each.atS))
    gauge('workers', 'Background processes heard of', same.length, { kind })
    gauge('worker_heard_age_seconds', 'Since the last word of any of them', now.getTime() / 1000 - newest, {
      kind,
    })
  }
}

import { index, integer, pgTable, primaryKey, real, smallint, text, uniqueIndex } from 'drizzle-orm/pg-core'
import { id, instant } from './columns'
import { sensors } from './sensors'

/**
 * What sensors said, never changed. In the database the table is partitioned by UTC month (see the first migration).
 * Columns stand by size, widest first, so that no row is padded. `marked` is 1 where co2_ppm lies outside 350 to 5000; `importId` lets an upload be undone.
 */
export const readings = pgTable(
  'readings',
  {
    at: instant('at').notNull(),
    receivedAt: instant('received_at').notNull().defaultNow(),
    sensorId: integer('sensor_id').notNull(),
    co2Ppm: real('co2_ppm').notNull(),
    tempC: real('temp_c'),
    rhPct: real('rh_pct'),
    importId: integer('import_id'),
    batteryPct: smallint('battery_pct'),
    rssiDbm: smallint('rssi_dbm'),
    marked: smallint('marked').notNull().default(0),
  },
  (t) => [primaryKey({ columns: [t.sensorId, t.at] })],
)

/** The newest reading of each sensor. */
export const latestReadings = pgTable('latest_readings', {
  sensorId: integer('sensor_id')
    .primaryKey()
    .references(() => sensors.id),
  at: instant('at').notNull(),
  receivedAt: instant('received_at').notNull(),
  co2Ppm: real('co2_ppm').notNull(),
  tempC: real('temp_c'),
  rhPct: real('rh_pct'),
  batteryPct: smallint('battery_pct'),
  rssiDbm: smallint('rssi_dbm'),
})

/** Messages and connects that were refused: counted per source, reason and hour, with one sample of at most 2 kB. */
export const refusedMessages = pgTable(
  'refused_messages',
  {
    id: id(),
    organizationId: integer('organization_id'),
    sensorId: integer('sensor_id'),
    source: text('source').notNull(),
    reason: text('reason').notNull(),
    hour: instant('hour').notNull(),
    count: integer('count').notNull().default(1),
    firstAt: instant('first_at').notNull(),
    lastAt: instant('last_at').notNull(),
    detail: text('detail').notNull(),
    sample: text('sample'),
  },
  (t) => [
    uniqueIndex('refused_messages_source_reason_hour').on(t.source, t.reason, t.hour),
    index('refused_messages_sensor').on(t.sensorId, t.hour),
  ],
)

/** Hours (UTC) of a building for which readings arrived late, so that the nights they touch are run again. */
export const lateReadings = pgTable(
  'late_readings',
  {
    buildingId: integer('building_id').notNull(),
    hour: instant('hour').notNull(),
    receivedAt: instant('received_at').notNull(),
  },
  (t) => [primaryKey({ columns: [t.buildingId, t.hour] })],
)

import { integer, pgTable, primaryKey, real } from 'drizzle-orm/pg-core'
import { buildings } from './buildings'
import { instant } from './columns'

/**
 * Lowest, mean and highest CO2 (ppm) of a sensor in stretches of 300, 900 and 3600 s of UTC and of a building-local day (86 400 s, 23 and
 * 25 h days included), as measured: offsets are added at reading. `start` is the stretch's first instant. In the database the table is
 * partitioned by resolution, so that the few rows that a year's chart needs lie together.
 */
export const readingRollups = pgTable(
  'reading_rollups',
  {
    start: instant('start').notNull(),
    sensorId: integer('sensor_id').notNull(),
    resolutionS: integer('resolution_s').notNull(),
    lowestPpm: real('lowest_ppm').notNull(),
    meanPpm: real('mean_ppm').notNull(),
    highestPpm: real('highest_ppm').notNull(),
    count: integer('count').notNull(),
  },
  (t) => [primaryKey({ columns: [t.sensorId, t.resolutionS, t.start] })],
)

/** Up to where a building's readings are rolled up; every stretch that ends by then is there. */
export const rollupProgress = pgTable('rollup_progress', {
  buildingId: integer('building_id')
    .primaryKey()
    .references(() => buildings.id),
  rolledTo: instant('rolled_to').notNull(),
})

/** Hours (UTC) of a building to be rolled up again because readings came late. */
export const rollupHours = pgTable(
  'rollup_hours',
  {
    buildingId: integer('building_id').notNull(),
    hour: instant('hour').notNull(),
  },
  (t) => [primaryKey({ columns: [t.buildingId, t.hour] })],
)

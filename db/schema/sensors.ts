import { boolean, doublePrecision, index, integer, pgTable, text, uniqueIndex } from 'drizzle-orm/pg-core'
import { buildings } from './buildings'
import { createdAt, id, instant } from './columns'
import { organizations } from './organizations'
import { users } from './people'
import { rooms } from './rooms'

/** A registered sensor. `deviceIdKey` is the device id in lower case, unique in the deployment. The secret is kept as SHA-256 only. */
export const sensors = pgTable(
  'sensors',
  {
    id: id(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    buildingId: integer('building_id')
      .notNull()
      .references(() => buildings.id),
    deviceId: text('device_id').notNull(),
    deviceIdKey: text('device_id_key').notNull(),
    label: text('label').notNull(),
    secretSha256: text('secret_sha256').notNull(),
    intervalS: integer('interval_s').notNull().default(60),
    reporting: text('reporting', { enum: ['interval', 'on-change'] })
      .notNull()
      .default('interval'),
    deadbandPpm: doublePrecision('deadband_ppm'),
    accuracyPpm: doublePrecision('accuracy_ppm'),
    accuracyPct: doublePrecision('accuracy_pct'),
    resolutionPpm: doublePrecision('resolution_ppm'),
    rangeMaxPpm: doublePrecision('range_max_ppm'),
    suspectSince: instant('suspect_since'),
    suspectReason: text('suspect_reason'),
    registeredBy: integer('registered_by').references(() => users.id),
    createdAt: createdAt(),
    retiredAt: instant('retired_at'),
  },
  (t) => [uniqueIndex('sensors_device_id_key').on(t.deviceIdKey), index('sensors_building').on(t.buildingId)],
)

/** Where a sensor hangs and when; no two placements of a sensor overlap. The lead sensor is the room's live number. */
export const placements = pgTable(
  'placements',
  {
    id: id(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    buildingId: integer('building_id')
      .notNull()
      .references(() => buildings.id),
    sensorId: integer('sensor_id')
      .notNull()
      .references(() => sensors.id),
    roomId: integer('room_id').references(() => rooms.id),
    position: text('position', { enum: ['room', 'exhaust', 'supply', 'outdoor', 'corridor'] }).notNull(),
    lead: boolean('lead').notNull().default(false),
    fromAt: instant('from_at').notNull(),
    toAt: instant('to_at'),
  },
  (t) => [
    index('placements_room').on(t.roomId),
    index('placements_sensor').on(t.sensorId, t.fromAt),
    index('placements_building').on(t.buildingId),
  ],
)

/** A correction found by a fresh-air check, ppm added to the reading from `fromAt` on; the raw reading stays. */
export const sensorOffsets = pgTable('sensor_offsets', {
  id: id(),
  organizationId: integer('organization_id')
    .notNull()
    .references(() => organizations.id),
  sensorId: integer('sensor_id')
    .notNull()
    .references(() => sensors.id),
  fromAt: instant('from_at').notNull(),
  offsetPpm: doublePrecision('offset_ppm').notNull(),
  standardUncertaintyPpm: doublePrecision('standard_uncertainty_ppm').notNull(),
  origin: text('origin').notNull(),
  createdBy: integer('created_by').references(() => users.id),
  createdAt: createdAt(),
})

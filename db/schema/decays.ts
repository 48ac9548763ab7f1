import {
  boolean,
  date,
  doublePrecision,
  index,
  integer,
  jsonb,
  pgTable,
  text,
  uniqueIndex,
} from 'drizzle-orm/pg-core'
import { buildings } from './buildings'
import { createdAt, id, instant, publicId } from './columns'
import { organizations } from './organizations'
import { users } from './people'
import { rooms } from './rooms'
import { sensors } from './sensors'

/** One decay as a method version saw one set of inputs; an older one is superseded, never overwritten. Columns follow lib/air/types Decay. */
export const decays = pgTable(
  'decays',
  {
    id: id(),
    publicId: publicId(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    buildingId: integer('building_id')
      .notNull()
      .references(() => buildings.id),
    roomId: integer('room_id')
      .notNull()
      .references(() => rooms.id),
    sensorId: integer('sensor_id')
      .notNull()
      .references(() => sensors.id),
    lead: boolean('lead').notNull(),
    night: date('night').notNull(),
    startAt: instant('start_at').notNull(),
    endAt: instant('end_at').notNull(),
    kind: text('kind', { enum: ['fit', 'at-least', 'at-most', 'range'] }).notNull(),
    airChangeRatePerHour: doublePrecision('air_change_rate_per_hour'),
    airChangeRateLowPerHour: doublePrecision('air_change_rate_low_per_hour'),
    airChangeRateHighPerHour: doublePrecision('air_change_rate_high_per_hour'),
    outdoorRateLowPerHour: doublePrecision('outdoor_rate_low_per_hour'),
    outdoorRateHighPerHour: doublePrecision('outdoor_rate_high_per_hour'),
    backgroundPpm: doublePrecision('background_ppm'),
    backgroundUncertaintyPpm: doublePrecision('background_uncertainty_ppm'),
    backgroundOrigin: text('background_origin'),
    startPpm: doublePrecision('start_ppm').notNull(),
    endPpm: doublePrecision('end_ppm').notNull(),
    meanAgeMin: doublePrecision('mean_age_min'),
    mode: text('mode').notNull(),
    modeFrom: text('mode_from'),
    quality: text('quality', { enum: ['accepted', 'doubtful', 'refused'] }).notNull(),
    reasons: text('reasons').array().notNull(),
    rateChangeAt: instant('rate_change_at'),
    rateChangeLowAt: instant('rate_change_low_at'),
    rateChangeHighAt: instant('rate_change_high_at'),
    lastPersonLeftAt: instant('last_person_left_at'),
    points: integer('points').notNull(),
    lagOneCorrelation: doublePrecision('lag_one_correlation'),
    effectivePoints: doublePrecision('effective_points'),
    residualSdPpm: doublePrecision('residual_sd_ppm'),
    uncertaintyParts: jsonb('uncertainty_parts'),
    checks: jsonb('checks').notNull(),
    sentence: text('sentence').notNull(),
    methodVersion: text('method_version').notNull(),
    inputHash: text('input_hash').notNull(),
    provisional: boolean('provisional').notNull(),
    supersededAt: instant('superseded_at'),
    createdAt: createdAt(),
  },
  (t) => [
    uniqueIndex('decays_identity').on(t.roomId, t.sensorId, t.methodVersion, t.inputHash, t.startAt),
    index('decays_room_night').on(t.roomId, t.night),
    index('decays_building_night').on(t.buildingId, t.night),
  ],
)

/** A person's decision on a decay; holds its own window and belongs to room and interval, so it outlives a re-run. */
export const decayReviews = pgTable(
  'decay_reviews',
  {
    id: id(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    buildingId: integer('building_id')
      .notNull()
      .references(() => buildings.id),
    roomId: integer('room_id')
      .notNull()
      .references(() => rooms.id),
    sensorId: integer('sensor_id')
      .notNull()
      .references(() => sensors.id),
    decayId: integer('decay_id')
      .notNull()
      .references(() => decays.id),
    decision: text('decision', { enum: ['keep', 'leave out', 'keep with window'] }).notNull(),
    fromAt: instant('from_at').notNull(),
    toAt: instant('to_at').notNull(),
    airChangeRatePerHour: doublePrecision('air_change_rate_per_hour'),
    airChangeRateLowPerHour: doublePrecision('air_change_rate_low_per_hour'),
    airChangeRateHighPerHour: doublePrecision('air_change_rate_high_per_hour'),
    reason: text('reason').notNull(),
    dataChanged: boolean('data_changed').notNull().default(false),
    createdBy: integer('created_by')
      .notNull()
      .references(() => users.id),
    createdAt: createdAt(),
    withdrawnAt: instant('withdrawn_at'),
  },
  (t) => [index('decay_reviews_room').on(t.roomId, t.fromAt), index('decay_reviews_decay').on(t.decayId)],
)

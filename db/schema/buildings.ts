import { date, doublePrecision, index, integer, pgTable, text, uniqueIndex } from 'drizzle-orm/pg-core'
import { createdAt, id, instant } from './columns'
import { organizations } from './organizations'
import { tenancies } from './tenancies'

/** `slug` is the {site} of MQTT topics and the building's address; unique in the deployment. */
export const buildings = pgTable('buildings', {
  id: id(),
  organizationId: integer('organization_id')
    .notNull()
    .references(() => organizations.id),
  slug: text('slug').notNull().unique(),
  name: text('name').notNull(),
  timeZone: text('time_zone').notNull(),
  altitudeM: doublePrecision('altitude_m'),
  outdoorDefaultPpm: doublePrecision('outdoor_default_ppm').notNull().default(430),
  outdoorDefaultUncertaintyPpm: doublePrecision('outdoor_default_uncertainty_ppm').notNull().default(15),
  outdoorDefaultDated: date('outdoor_default_dated').notNull().default('2026-01-01'),
  createdAt: createdAt(),
})

/** `ordinal` sorts from the ground up: 0 ground, 1 first, −1 basement. */
export const floors = pgTable('floors', {
  id: id(),
  organizationId: integer('organization_id')
    .notNull()
    .references(() => organizations.id),
  buildingId: integer('building_id')
    .notNull()
    .references(() => buildings.id),
  name: text('name').notNull(),
  ordinal: integer('ordinal').notNull(),
})

/** `airSystem` says what air it supplies; without `outdoorFraction` a recirculating one gives dilution rates only. */
export const airHandlers = pgTable(
  'air_handlers',
  {
    id: id(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    buildingId: integer('building_id')
      .notNull()
      .references(() => buildings.id),
    code: text('code').notNull(),
    name: text('name').notNull(),
    airSystem: text('air_system', { enum: ['outdoor', 'recirculating', 'natural', 'unknown'] })
      .notNull()
      .default('unknown'),
    outdoorFraction: doublePrecision('outdoor_fraction'),
    outdoorFractionUncertainty: doublePrecision('outdoor_fraction_uncertainty'),
    secretSha256: text('secret_sha256'),
  },
  (t) => [uniqueIndex('air_handlers_building_code').on(t.buildingId, t.code)],
)

/** Weekly hours, building-local: `occupied` of a building or tenancy, `supply` of an air handler. Days are ISO weekdays. */
export const hours = pgTable('hours', {
  id: id(),
  organizationId: integer('organization_id')
    .notNull()
    .references(() => organizations.id),
  buildingId: integer('building_id')
    .notNull()
    .references(() => buildings.id),
  purpose: text('purpose', { enum: ['occupied', 'supply'] }).notNull(),
  airHandlerId: integer('air_handler_id').references(() => airHandlers.id),
  tenancyId: integer('tenancy_id').references(() => tenancies.id),
  days: integer('days').array().notNull(),
  fromLocal: text('from_local').notNull(),
  toLocal: text('to_local').notNull(),
})

/** Days on which the building is shut (building-local dates, both included). */
export const closures = pgTable('closures', {
  id: id(),
  organizationId: integer('organization_id')
    .notNull()
    .references(() => organizations.id),
  buildingId: integer('building_id')
    .notNull()
    .references(() => buildings.id),
  name: text('name').notNull(),
  fromDate: date('from_date').notNull(),
  toDate: date('to_date').notNull(),
})

/** Supply status as an air handler's gateway reports it; each state holds until the next. */
export const supplyStates = pgTable(
  'supply_states',
  {
    id: id(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    buildingId: integer('building_id')
      .notNull()
      .references(() => buildings.id),
    airHandlerId: integer('air_handler_id')
      .notNull()
      .references(() => airHandlers.id),
    at: instant('at').notNull(),
    state: text('state', { enum: ['on', 'reduced', 'off'] }).notNull(),
    outdoorFraction: doublePrecision('outdoor_fraction'),
    supplyLps: doublePrecision('supply_lps'),
    receivedAt: instant('received_at').notNull().defaultNow(),
  },
  (t) => [
    uniqueIndex('supply_states_handler_at').on(t.airHandlerId, t.at),
    index('supply_states_at').on(t.at),
  ],
)

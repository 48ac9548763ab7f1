import {
  type AnyPgColumn,
  boolean,
  date,
  doublePrecision,
  index,
  integer,
  pgTable,
  text,
  uniqueIndex,
} from 'drizzle-orm/pg-core'
import { airHandlers, buildings, floors } from './buildings'
import { createdAt, id, publicId } from './columns'
import { organizations } from './organizations'

/** The requirement a room is held against: a preset of lib/air/targets (by key) or a flow of its own. */
export const bases = pgTable('bases', {
  id: id(),
  organizationId: integer('organization_id')
    .notNull()
    .references(() => organizations.id),
  name: text('name').notNull(),
  kind: text('kind', { enum: ['preset', 'design-flow', 'per-person'] }).notNull(),
  presetKey: text('preset_key'),
  flowLpsPerPerson: doublePrecision('flow_lps_per_person'),
  flowLpsPerM2: doublePrecision('flow_lps_per_m2'),
})

/** A room or a corridor. `kind` corridor is measured as a neighbour and stands on no board. */
export const rooms = pgTable(
  'rooms',
  {
    id: id(),
    publicId: publicId(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    buildingId: integer('building_id')
      .notNull()
      .references(() => buildings.id),
    floorId: integer('floor_id')
      .notNull()
      .references(() => floors.id),
    airHandlerId: integer('air_handler_id').references(() => airHandlers.id),
    neighbourRoomId: integer('neighbour_room_id').references((): AnyPgColumn => rooms.id),
    kind: text('kind', { enum: ['room', 'corridor'] })
      .notNull()
      .default('room'),
    number: text('number').notNull(),
    name: text('name').notNull(),
    use: text('use').notNull(),
    airSystem: text('air_system', { enum: ['outdoor', 'recirculating', 'natural', 'unknown'] }),
    singlePerson: boolean('single_person').notNull().default(false),
    basisId: integer('basis_id').references(() => bases.id),
    limitKind: text('limit_kind', { enum: ['above outdoor', 'absolute'] })
      .notNull()
      .default('above outdoor'),
    limitPpm: doublePrecision('limit_ppm').notNull().default(800),
    limitOrigin: text('limit_origin').notNull().default('EN 16798-1:2019 category II'),
    createdAt: createdAt(),
  },
  (t) => [
    uniqueIndex('rooms_building_number').on(t.buildingId, t.number),
    index('rooms_organization').on(t.organizationId),
  ],
)

/** What the room was designed as, from a date on; uncertainties are relative standard uncertainties. */
export const roomDesigns = pgTable(
  'room_designs',
  {
    id: id(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    roomId: integer('room_id')
      .notNull()
      .references(() => rooms.id),
    validFrom: date('valid_from').notNull(),
    volumeM3: doublePrecision('volume_m3').notNull(),
    volumeRelativeUncertainty: doublePrecision('volume_relative_uncertainty').notNull().default(0.05),
    floorAreaM2: doublePrecision('floor_area_m2').notNull(),
    designHeadcount: integer('design_headcount').notNull(),
    permittedOccupancy: integer('permitted_occupancy'),
    designFlowLps: doublePrecision('design_flow_lps'),
  },
  (t) => [uniqueIndex('room_designs_room_from').on(t.roomId, t.validFrom)],
)

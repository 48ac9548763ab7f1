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
import { airHandlers, buildings } from './buildings'
import { createdAt, id, instant, publicId } from './columns'
import { organizations } from './organizations'
import { rooms } from './rooms'

/**
 * One room, one local week (Monday), one mode. `rate…` is the week's own figure; `verdict…` and `flow…` speak for the last 28 local
 * days up to `throughNight`, since the last change point. Flow is null where the figure is a dilution rate.
 */
export const roomWeeks = pgTable(
  'room_weeks',
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
    weekStart: date('week_start').notNull(),
    throughNight: date('through_night').notNull(),
    mode: text('mode').notNull(),
    modeFrom: text('mode_from'),
    airChangeRatePerHour: doublePrecision('air_change_rate_per_hour'),
    airChangeRateLowPerHour: doublePrecision('air_change_rate_low_per_hour'),
    airChangeRateHighPerHour: doublePrecision('air_change_rate_high_per_hour'),
    days: integer('days').notNull(),
    decays: integer('decays').notNull(),
    decaysRefused: integer('decays_refused').notNull(),
    verdict: text('verdict', { enum: ['meets basis', 'short of basis', 'not proven'] }),
    verdictReason: text('verdict_reason'),
    verdictSentence: text('verdict_sentence'),
    verdictRatePerHour: doublePrecision('verdict_rate_per_hour'),
    verdictRateLowPerHour: doublePrecision('verdict_rate_low_per_hour'),
    verdictRateHighPerHour: doublePrecision('verdict_rate_high_per_hour'),
    verdictDays: integer('verdict_days'),
    verdictDecays: integer('verdict_decays'),
    verdictSince: date('verdict_since'),
    isDilutionRate: boolean('is_dilution_rate').notNull().default(false),
    flowLps: doublePrecision('flow_lps'),
    flowLowLps: doublePrecision('flow_low_lps'),
    flowHighLps: doublePrecision('flow_high_lps'),
    basisName: text('basis_name'),
    basisFlowLps: doublePrecision('basis_flow_lps'),
    designHeadcount: integer('design_headcount'),
    supportsPersons: integer('supports_persons'),
    volumeM3: doublePrecision('volume_m3').notNull(),
    methodVersion: text('method_version').notNull(),
    inputHash: text('input_hash').notNull(),
    computedAt: instant('computed_at').notNull().defaultNow(),
  },
  (t) => [
    uniqueIndex('room_weeks_identity').on(t.roomId, t.weekStart, t.mode, t.methodVersion),
    index('room_weeks_building_week').on(t.buildingId, t.weekStart),
  ],
)

/** A step or drift of a room's rate within one mode, with its date and its size as a ratio after / before. */
export const rateChanges = pgTable(
  'rate_changes',
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
    mode: text('mode').notNull(),
    kind: text('kind', { enum: ['step', 'drift'] }).notNull(),
    onNight: date('on_night').notNull(),
    ratio: doublePrecision('ratio').notNull(),
    ratioLow: doublePrecision('ratio_low'),
    ratioHigh: doublePrecision('ratio_high'),
    beforePerHour: doublePrecision('before_per_hour'),
    afterPerHour: doublePrecision('after_per_hour'),
    sentence: text('sentence').notNull(),
    methodVersion: text('method_version').notNull(),
    foundAt: instant('found_at').notNull().defaultNow(),
  },
  (t) => [uniqueIndex('rate_changes_identity').on(t.roomId, t.mode, t.kind, t.methodVersion, t.onNight)],
)

/** What the nightly job found beside the figures: supply stopped early, ventilated while empty, too small for its use, … */
export const findings = pgTable(
  'findings',
  {
    id: id(),
    publicId: publicId(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    buildingId: integer('building_id')
      .notNull()
      .references(() => buildings.id),
    roomId: integer('room_id').references(() => rooms.id),
    airHandlerId: integer('air_handler_id').references(() => airHandlers.id),
    kind: text('kind', {
      enum: [
        'supply stopped early',
        'ventilated while empty',
        'too small for its use',
        'air from neighbour',
        'sensor drifting',
        'sensor silent',
      ],
    }).notNull(),
    subjectKey: text('subject_key').notNull(),
    firstNight: date('first_night').notNull(),
    lastNight: date('last_night').notNull(),
    nights: integer('nights').notNull(),
    detail: jsonb('detail').notNull(),
    sentence: text('sentence').notNull(),
    methodVersion: text('method_version').notNull(),
    createdAt: createdAt(),
  },
  (t) => [uniqueIndex('findings_identity').on(t.buildingId, t.kind, t.subjectKey, t.methodVersion)],
)

/**
 * One analysis of one building-local date for one set of inputs; the unique row makes a night run once. `carried` is what later nights
 * and the findings lean on: quiet floors per sensor, supply stops per air handler, notes per room.
 */
export const nightRuns = pgTable(
  'night_runs',
  {
    id: id(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    buildingId: integer('building_id')
      .notNull()
      .references(() => buildings.id),
    localDate: date('local_date').notNull(),
    methodVersion: text('method_version').notNull(),
    inputHash: text('input_hash').notNull(),
    state: text('state', { enum: ['running', 'done', 'failed'] }).notNull(),
    provisional: boolean('provisional').notNull(),
    startedAt: instant('started_at').notNull(),
    finishedAt: instant('finished_at'),
    roomsAnalysed: integer('rooms_analysed'),
    decaysFound: integer('decays_found'),
    error: text('error'),
    carried: jsonb('carried').notNull().default({}),
  },
  (t) => [
    uniqueIndex('night_runs_identity').on(t.buildingId, t.localDate, t.methodVersion, t.inputHash),
    index('night_runs_building_date').on(t.buildingId, t.localDate),
  ],
)

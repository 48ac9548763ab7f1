import { bigint, boolean, index, integer, jsonb, pgTable, primaryKey, text } from 'drizzle-orm/pg-core'
import type { FeedMapping } from '@/lib/wire/feed'
import { buildings } from './buildings'
import { createdAt, id, instant, publicId } from './columns'
import { organizations } from './organizations'
import { users } from './people'

/**
 * A subscription to somebody else's broker whose messages hold readings of our sensors. `passwordSealed` is encrypted with the
 * deployment's key. `runner` holds the feed until `leasedUntil`, so that several runners share the feeds.
 */
export const feeds = pgTable(
  'feeds',
  {
    id: id(),
    publicId: publicId(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    buildingId: integer('building_id')
      .notNull()
      .references(() => buildings.id),
    name: text('name').notNull(),
    brokerUrl: text('broker_url').notNull(),
    userName: text('user_name'),
    passwordSealed: text('password_sealed'),
    caPem: text('ca_pem'),
    topicFilter: text('topic_filter').notNull(),
    mapping: jsonb('mapping').$type<FeedMapping>().notNull(),
    enabled: boolean('enabled').notNull().default(false),
    createdBy: integer('created_by').references(() => users.id),
    createdAt: createdAt(),
    changedAt: instant('changed_at').notNull().defaultNow(),
    runner: text('runner'),
    leasedUntil: instant('leased_until'),
    connectedAt: instant('connected_at'),
    lastMessageAt: instant('last_message_at'),
    lastError: text('last_error'),
    lastErrorAt: instant('last_error_at'),
    messages: bigint('messages', { mode: 'number' }).notNull().default(0),
    readings: bigint('readings', { mode: 'number' }).notNull().default(0),
    refusals: bigint('refusals', { mode: 'number' }).notNull().default(0),
  },
  (t) => [index('feeds_building').on(t.buildingId)],
)

/** Device ids that a feed has named and that are not registered in its building: candidates, nothing of theirs is stored. */
export const feedCandidates = pgTable(
  'feed_candidates',
  {
    feedId: integer('feed_id')
      .notNull()
      .references(() => feeds.id),
    deviceId: text('device_id').notNull(),
    messages: bigint('messages', { mode: 'number' }).notNull(),
    firstAt: instant('first_at').notNull(),
    lastAt: instant('last_at').notNull(),
    lastCo2Ppm: text('last_co2_ppm'),
  },
  (t) => [primaryKey({ columns: [t.feedId, t.deviceId] })],
)

import { date, integer, jsonb, pgTable, text, uniqueIndex } from 'drizzle-orm/pg-core'
import { buildings } from './buildings'
import { createdAt, id, instant, publicId } from './columns'
import { organizations } from './organizations'
import { tenancies } from './tenancies'

/** One tenancy's week in plain words; `content` is what page and mail both show. */
export const digests = pgTable(
  'digests',
  {
    id: id(),
    publicId: publicId(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    buildingId: integer('building_id')
      .notNull()
      .references(() => buildings.id),
    tenancyId: integer('tenancy_id')
      .notNull()
      .references(() => tenancies.id),
    weekStart: date('week_start').notNull(),
    content: jsonb('content').notNull(),
    createdAt: createdAt(),
  },
  (t) => [uniqueIndex('digests_tenancy_week').on(t.tenancyId, t.weekStart)],
)

export const digestDeliveries = pgTable(
  'digest_deliveries',
  {
    id: id(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    digestId: integer('digest_id')
      .notNull()
      .references(() => digests.id),
    email: text('email').notNull(),
    state: text('state', { enum: ['queued', 'sent', 'failed'] }).notNull(),
    messageId: text('message_id'),
    error: text('error'),
    createdAt: createdAt(),
    sentAt: instant('sent_at'),
  },
  (t) => [uniqueIndex('digest_deliveries_digest_email').on(t.digestId, t.email)],
)

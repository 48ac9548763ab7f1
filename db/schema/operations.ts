import { index, integer, jsonb, pgTable, text } from 'drizzle-orm/pg-core'
import { id, instant } from './columns'
import { organizations } from './organizations'
import { users } from './people'

/** Every process that works in the background says here that it lives. */
export const workerHeartbeats = pgTable('worker_heartbeats', {
  id: text('id').primaryKey(),
  kind: text('kind', { enum: ['broker', 'ingest', 'feeds', 'jobs', 'web', 'demo'] }).notNull(),
  startedAt: instant('started_at').notNull(),
  at: instant('at').notNull(),
  info: jsonb('info').notNull().default({}),
})

/** Who changed what, from what to what; the application may only add and read. */
export const auditEvents = pgTable(
  'audit_events',
  {
    id: id(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    at: instant('at').notNull().defaultNow(),
    userId: integer('user_id').references(() => users.id),
    action: text('action').notNull(),
    subjectKind: text('subject_kind').notNull(),
    subjectId: text('subject_id').notNull(),
    detail: jsonb('detail').notNull(),
  },
  (t) => [index('audit_events_organization_at').on(t.organizationId, t.at)],
)

import { integer, jsonb, pgTable, primaryKey, text } from 'drizzle-orm/pg-core'
import { buildings } from './buildings'
import { createdAt, id, instant, publicId } from './columns'
import { organizations } from './organizations'
import { users } from './people'

/** A key by which a program signs in; kept as SHA-256 only. `buildingId` null: every building of the organisation. */
export const apiKeys = pgTable('api_keys', {
  id: id(),
  publicId: publicId(),
  organizationId: integer('organization_id')
    .notNull()
    .references(() => organizations.id),
  buildingId: integer('building_id').references(() => buildings.id),
  name: text('name').notNull(),
  /** the first signs of the key, by which people tell keys apart */
  beginsWith: text('begins_with').notNull(),
  keySha256: text('key_sha256').notNull().unique(),
  scopes: text('scopes').array().notNull(),
  createdBy: integer('created_by').references(() => users.id),
  createdAt: createdAt(),
  lastUsedAt: instant('last_used_at'),
  revokedAt: instant('revoked_at'),
})

/** What was answered to a request with an idempotency key, kept for a day: the same request again gets the same answer. */
export const apiAnswers = pgTable(
  'api_answers',
  {
    apiKeyId: integer('api_key_id')
      .notNull()
      .references(() => apiKeys.id),
    idempotencyKey: text('idempotency_key').notNull(),
    bodySha256: text('body_sha256').notNull(),
    answer: jsonb('answer').notNull(),
    at: instant('at').notNull(),
  },
  (t) => [primaryKey({ columns: [t.apiKeyId, t.idempotencyKey] })],
)

import { boolean, index, inet, integer, pgTable, text, uniqueIndex, uuid } from 'drizzle-orm/pg-core'
import { createdAt, id, instant, publicId } from './columns'
import { organizations } from './organizations'
import { tenancies } from './tenancies'

/** A person who can sign in. `email` is stored in lower case; `version` rises when every session must end. */
export const users = pgTable('users', {
  id: id(),
  publicId: publicId(),
  email: text('email').notNull().unique(),
  name: text('name').notNull(),
  passwordHash: text('password_hash'),
  version: integer('version').notNull().default(1),
  units: text('units', { enum: ['si', 'ip'] })
    .notNull()
    .default('si'),
  isDemo: boolean('is_demo').notNull().default(false),
  createdAt: createdAt(),
})

/** One person in one organisation: a set of roles, restricted to buildings (null = all) or to a tenancy (null = none). */
export const memberships = pgTable(
  'memberships',
  {
    id: id(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    userId: integer('user_id')
      .notNull()
      .references(() => users.id),
    roles: text('roles').array().notNull(),
    buildingIds: integer('building_ids').array(),
    tenancyId: integer('tenancy_id').references(() => tenancies.id),
    createdAt: createdAt(),
  },
  (t) => [uniqueIndex('memberships_user_organization').on(t.userId, t.organizationId)],
)

/** A signed-in session; the cookie carries only its id. */
export const sessions = pgTable(
  'sessions',
  {
    id: uuid('id').primaryKey().defaultRandom(),
    userId: integer('user_id')
      .notNull()
      .references(() => users.id),
    userVersion: integer('user_version').notNull(),
    userAgent: text('user_agent'),
    createdAt: createdAt(),
    expiresAt: instant('expires_at').notNull(),
    revokedAt: instant('revoked_at'),
  },
  (t) => [index('sessions_user').on(t.userId)],
)

/** Every attempt to sign in, for rate limits and for the audit trail. */
export const signInEvents = pgTable(
  'sign_in_events',
  {
    id: id(),
    at: instant('at').notNull().defaultNow(),
    email: text('email').notNull(),
    address: inet('address'),
    outcome: text('outcome', {
      enum: ['signed-in', 'wrong', 'limited', 'signed-out', 'signed-out-everywhere'],
    }).notNull(),
    userId: integer('user_id').references(() => users.id),
  },
  (t) => [
    index('sign_in_events_email_at').on(t.email, t.at),
    index('sign_in_events_address_at').on(t.address, t.at),
  ],
)

import { index, integer, pgTable, text } from 'drizzle-orm/pg-core'
import { buildings } from './buildings'
import { createdAt, id, instant, publicId } from './columns'
import { organizations } from './organizations'
import { rooms } from './rooms'

/** Someone who rents rooms in a building. `digestEmails` are the people who receive the weekly digest. */
export const tenancies = pgTable('tenancies', {
  id: id(),
  publicId: publicId(),
  organizationId: integer('organization_id')
    .notNull()
    .references(() => organizations.id),
  buildingId: integer('building_id')
    .notNull()
    .references(() => buildings.id),
  name: text('name').notNull(),
  digestEmails: text('digest_emails').array().notNull(),
  createdAt: createdAt(),
})

/** Which rooms a tenancy holds, and when: a tenant sees only readings inside its period. */
export const roomTenancies = pgTable(
  'room_tenancies',
  {
    id: id(),
    organizationId: integer('organization_id')
      .notNull()
      .references(() => organizations.id),
    roomId: integer('room_id')
      .notNull()
      .references(() => rooms.id),
    tenancyId: integer('tenancy_id')
      .notNull()
      .references(() => tenancies.id),
    fromAt: instant('from_at').notNull(),
    toAt: instant('to_at'),
  },
  (t) => [
    index('room_tenancies_tenancy').on(t.tenancyId, t.roomId),
    index('room_tenancies_room').on(t.roomId),
  ],
)

import { integer, text, timestamp } from 'drizzle-orm/pg-core'

/** Internal key: an integer identity; what people see in addresses is `publicId`. */
export const id = () => integer('id').primaryKey().generatedAlwaysAsIdentity()

/** Public, unguessable id for addresses and the API; made by `newPublicId` of db/public-id.ts. */
export const publicId = () => text('public_id').notNull().unique()

/** An instant; always with time zone. */
export const instant = (name: string) => timestamp(name, { withTimezone: true, mode: 'date' })

export const createdAt = () => instant('created_at').notNull().defaultNow()

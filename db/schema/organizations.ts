import { boolean, pgTable, text } from 'drizzle-orm/pg-core'
import { createdAt, id, publicId } from './columns'

export const organizations = pgTable('organizations', {
  id: id(),
  publicId: publicId(),
  name: text('name').notNull(),
  isDemo: boolean('is_demo').notNull().default(false),
  createdAt: createdAt(),
})

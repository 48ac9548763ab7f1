import { boolean, integer, pgTable, text } from 'drizzle-orm/pg-core'
import { createdAt, id, publicId } from './columns'

/** `readingsKeptDays` and `rollupsKeptDays`: how long the record is kept; null keeps it as long as the deployment does. */
export const organizations = pgTable('organizations', {
  id: id(),
  publicId: publicId(),
  name: text('name').notNull(),
  isDemo: boolean('is_demo').notNull().default(false),
  readingsKeptDays: integer('readings_kept_days'),
  rollupsKeptDays: integer('rollups_kept_days'),
  createdAt: createdAt(),
})

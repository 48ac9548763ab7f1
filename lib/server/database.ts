import { type Database, openDatabase } from '@/db/client'
import { env } from './env'
import { log } from './log'

const holder = globalThis as unknown as { ebbmarkDatabase?: Database }

/** The database of this process, opened at first use; one per process, also across hot reloads. */
export function database(): Database {
  holder.ebbmarkDatabase ??= openDatabase({
    url: env().DATABASE_URL,
    onError: (error) => log().warn({ err: error }, 'an idle database connection was lost'),
  })
  return holder.ebbmarkDatabase
}

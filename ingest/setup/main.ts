/** Set-up of a start, a process of its own: migrations, first organisation or demo building, nights not yet analysed. Safe to run again. */
import { migrateDatabase } from '@/db/migrate'
import { systemClock } from '@/lib/server/clock'
import { database } from '@/lib/server/database'
import { env } from '@/lib/server/env'
import { prepareDemo } from './demo'
import { prepareOrganization } from './organization'

const say = (line: string) => process.stdout.write(`${line}\n`)

async function timed<T>(words: string, fn: () => Promise<T>): Promise<T> {
  const from = performance.now()
  const result = await fn()
  say(`  ${words} (${((performance.now() - from) / 1000).toFixed(1)} s)`)
  return result
}

async function main(): Promise<void> {
  const { DATABASE_DIRECT_URL, DATABASE_OWNER_URL, DATABASE_URL, EBBMARK_DEMO } = env()
  await timed('database migrated', () =>
    migrateDatabase(DATABASE_OWNER_URL ?? DATABASE_DIRECT_URL ?? DATABASE_URL, systemClock.now()),
  )
  if (EBBMARK_DEMO) await prepareDemo({ database: database(), timed, say })
  else await prepareOrganization({ database: database(), say })
  await database().close()
}

main().catch((error) => {
  process.stderr.write(`${error instanceof Error ? (error.stack ?? error.message) : String(error)}\n`)
  process.exit(1)
})

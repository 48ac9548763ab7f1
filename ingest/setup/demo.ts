import type { Database } from '@/db/client'
import { catchUp } from '@/ingest/nightly/catch-up'
import { rollUp } from '@/ingest/nightly/roll-up'
import { seedDemo } from '@/ingest/simulator/load'
import { ensureDemoPeople } from '@/lib/server/auth/demo-people'
import { systemClock } from '@/lib/server/clock'
import { env } from '@/lib/server/env'

type Options = {
  database: Database
  say: (line: string) => void
  timed: <T>(words: string, fn: () => Promise<T>) => Promise<T>
}

/** The demo building with its people and eight weeks of record, and every night up to yesterday analysed. */
export async function prepareDemo({ database, timed, say }: Options): Promise<void> {
  const dataDir = env().EBBMARK_DATA_DIR
  const now = systemClock.now()
  const demo = await timed('demo building and its record ready', () => seedDemo({ database, dataDir, now }))
  await timed('readings rolled up', () =>
    rollUp({ database, clock: systemClock, readingsKeptDays: env().EBBMARK_READINGS_KEPT_DAYS ?? null }),
  )
  await timed('demo people ready', () =>
    ensureDemoPeople(database, dataDir, {
      organizationId: demo.organizationId,
      buildingId: demo.buildingId,
      tenancyId: demo.tenancyIds.weir ?? 0,
    }),
  )
  await timed('nights analysed, weeks judged, letters written', () =>
    catchUp({ database, clock: systemClock, say: (line) => say(`  ${line}`) }),
  )
}

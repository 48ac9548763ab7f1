import type { Database } from '@/db/client'
import { analyseHistory } from '@/ingest/nightly/analysis/history'
import { judgeWeeks } from '@/ingest/nightly/judge/judge'
import { seedDemo } from '@/ingest/simulator/load'
import { ensureDemoPeople } from '@/lib/server/auth/demo-people'
import { systemClock } from '@/lib/server/clock'
import { env } from '@/lib/server/env'
import { addDays, localDate } from '@/lib/time'

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
  await timed('demo people ready', () =>
    ensureDemoPeople(database, dataDir, {
      organizationId: demo.organizationId,
      buildingId: demo.buildingId,
      tenancyId: demo.tenancyIds.weir ?? 0,
    }),
  )
  const { timeZone } = demo.world.scenario.building
  const fromDate = addDays(localDate(demo.world.historyStartS, timeZone), 1)
  const toDate = addDays(localDate(now.getTime() / 1000, timeZone), -1)
  const result = await timed('nights analysed', () =>
    analyseHistory({ database, buildingId: demo.buildingId, fromDate, toDate }),
  )
  say(`  ${result.nights} nights, ${result.changed.length} new or changed, ${result.decaysAdded} decays`)
  const changed = [...result.changed].sort()
  const [first, last] = [changed[0], changed.at(-1)]
  if (first && last)
    await timed('weeks judged', () =>
      judgeWeeks({ database, buildingId: demo.buildingId, fromDate: first, toDate: last }),
    )
}

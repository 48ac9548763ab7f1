import type { Database } from '@/db/client'
import { listBuildings } from '@/db/queries/building-plan'
import { finishedNights, firstReadingAt } from '@/db/queries/nights'
import { METHOD_VERSION } from '@/lib/air/decay/version'
import { weekStartOf } from '@/lib/air/nights'
import type { Clock } from '@/lib/server/clock'
import { writeDigests } from '@/lib/server/digests/write'
import { addDays, localDate } from '@/lib/time'
import { analyseHistory } from './analysis/history'
import { dueNights, lastWholeWeek } from './due'
import { judgeWeeks } from './judge/judge'
import { watchSensors } from './watch/silent'

export type CatchUpOptions = {
  database: Database
  clock: Clock
  /** told in words how far it is */
  say: (line: string) => void
  stopped?: () => boolean
}

type Building = Awaited<ReturnType<typeof listBuildings>>[number]

async function nightsDue({ database, clock }: CatchUpOptions, building: Building): Promise<string[]> {
  const { id: buildingId, timeZone } = building
  const nowS = clock.now().getTime() / 1000
  return database.asSystem('catch up', async (tx) => {
    const firstAt = await firstReadingAt(tx, { buildingId })
    const runs = await finishedNights(tx, { buildingId, methodVersion: METHOD_VERSION })
    const firstDate = firstAt && localDate(firstAt.getTime() / 1000, timeZone)
    return dueNights({ timeZone, nowS, firstDate, runs })
  })
}

/** Digests of the weeks that ended within some nights; only the last one is mailed, the others are pages. */
async function digestsOf(options: CatchUpOptions, building: Building, fromDate: string): Promise<number> {
  const { database, clock } = options
  const newest = lastWholeWeek(clock.now().getTime() / 1000, building.timeZone)
  let written = 0
  for (let week = weekStartOf(fromDate); week <= newest; week = addDays(week, 7)) {
    const mails = week === newest
    const ids = await writeDigests({ database, clock, buildingId: building.id, weekStart: week, mails })
    written += ids.length
  }
  return written
}

async function catchUpBuilding(options: CatchUpOptions, building: Building): Promise<void> {
  const { database, clock, say, stopped } = options
  const due = await nightsDue(options, building)
  const fromDate = due[0]
  const toDate = due.at(-1)
  if (fromDate === undefined || toDate === undefined) return
  const buildingId = building.id
  const span = { database, clock, buildingId, fromDate, toDate }
  const result = await analyseHistory({
    ...span,
    ...(stopped ? { stopped } : {}),
    onProgress: ({ date, done, total }) => {
      if (done % 7 === 0 || done === total)
        say(`${building.slug}: night ${done} of ${total} analysed (${date})`)
    },
  })
  if (stopped?.()) return
  const { weeks } = await judgeWeeks(span)
  await watchSensors({ database, clock, buildingId })
  const digests = await digestsOf(options, building, fromDate)
  say(
    `${building.slug}: ${result.decaysAdded} decays found, ${weeks.length} weeks judged, ${digests} digests written`,
  )
}

/**
 * Analyses every night that is due and missing, of every building, judges their weeks and writes their digests: what npm start does before
 * it says that it is ready. Ended early, it goes on from there the next time.
 */
export async function catchUp(options: CatchUpOptions): Promise<void> {
  const buildings = await options.database.asSystem('catch up', (tx) => listBuildings(tx))
  for (const building of buildings) {
    if (options.stopped?.()) return
    await catchUpBuilding(options, building)
  }
}

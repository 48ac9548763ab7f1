import { makeReadingsMonths } from '@/db/changes/months'
import type { ScheduledJob } from '../job'

/** Months made ahead, so that the first reading of a month finds its partition. */
const MONTHS_AHEAD = 3

export const makeMonthsJob: ScheduledJob = {
  task: 'make-months',
  run: ({ database, clock }) =>
    database.asSystem('make months', (tx) =>
      makeReadingsMonths(tx, { now: clock.now(), months: MONTHS_AHEAD }),
    ),
}

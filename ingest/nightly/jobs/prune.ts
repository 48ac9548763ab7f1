import { ANSWER_KEPT_MS, pruneApiAnswers } from '@/db/changes/api-keys'
import { pruneSessions, pruneSignInEvents } from '@/db/changes/prune'
import type { ScheduledJob } from '../job'

const DAY_MS = 86_400_000
/** Ended sessions are kept for the sign-in history of a month, sign-in attempts for a quarter. */
const SESSION_DAYS = 30
const SIGN_IN_DAYS = 90

export const pruneJob: ScheduledJob = {
  task: 'prune',
  run: ({ database, clock }) =>
    database.asSystem('prune', async (tx) => {
      const daysAgo = (days: number) => new Date(clock.now().getTime() - days * DAY_MS)
      await pruneSessions(tx, { endedBefore: daysAgo(SESSION_DAYS) })
      await pruneSignInEvents(tx, { before: daysAgo(SIGN_IN_DAYS) })
      await pruneApiAnswers(tx, { before: new Date(clock.now().getTime() - ANSWER_KEPT_MS) })
    }),
}

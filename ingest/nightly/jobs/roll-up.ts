import { env } from '@/lib/server/env'
import type { ScheduledJob } from '../job'
import { rollUp } from '../roll-up'

export const rollUpJob: ScheduledJob = {
  task: 'roll-up',
  run: async ({ database, clock, stopped }) => {
    await rollUp({ database, clock, stopped, readingsKeptDays: env().EBBMARK_READINGS_KEPT_DAYS ?? null })
  },
}

import { z } from 'zod'
import { defineJob } from '../job'
import { judgeWeeks } from '../judge/judge'
import { dateSchema, idSchema } from './payloads'

/** Weeks, verdicts, rate changes and findings of one building, after nights or reviews changed. */
export const judgeWeeksJob = defineJob({
  task: 'judge-weeks',
  payload: z.object({ buildingId: idSchema, fromDate: dateSchema, toDate: dateSchema }),
  run: async (payload, { database, clock }) => {
    await judgeWeeks({ database, clock, ...payload })
  },
})

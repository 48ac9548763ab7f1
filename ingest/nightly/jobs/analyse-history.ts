import { z } from 'zod'
import { queueJob } from '@/db/changes/jobs'
import { analyseHistory } from '../analysis/history'
import { defineJob } from '../job'
import { dateSchema, idSchema } from './payloads'

/** Many nights of one building, read together: the first start, or days on which no runner ran. */
export const analyseHistoryJob = defineJob({
  task: 'analyse-history',
  payload: z.object({ buildingId: idSchema, fromDate: dateSchema, toDate: dateSchema }),
  run: async (payload, { database, clock, stopped }) => {
    await analyseHistory({ database, clock, ...payload, stopped })
    await database.asSystem('queue weeks', async (tx) => {
      await queueJob(tx, { task: 'judge-weeks', payload })
      // what was left when the process had to end comes first next time; nights that are done cost little
      if (stopped()) await queueJob(tx, { task: 'analyse-history', payload })
    })
  },
})

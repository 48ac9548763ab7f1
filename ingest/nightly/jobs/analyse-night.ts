import { z } from 'zod'
import { queueJob } from '@/db/changes/jobs'
import { analyseHistory } from '../analysis/history'
import { defineJob } from '../job'
import { dateSchema, idSchema } from './payloads'

/** One building's night: decays of every room that start on the date. Its weeks are judged afterwards. */
export const analyseNightJob = defineJob({
  task: 'analyse-night',
  payload: z.object({ buildingId: idSchema, date: dateSchema }),
  run: async ({ buildingId, date }, { database, clock }) => {
    await analyseHistory({ database, clock, buildingId, fromDate: date, toDate: date })
    // also where nothing changed: an earlier attempt may have ended between the two
    await database.asSystem('queue weeks', (tx) =>
      queueJob(tx, { task: 'judge-weeks', payload: { buildingId, fromDate: date, toDate: date } }),
    )
  },
})

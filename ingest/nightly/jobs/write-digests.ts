import { z } from 'zod'
import { writeDigests } from '@/lib/server/digests/write'
import { addDays } from '@/lib/time'
import { defineJob } from '../job'
import { judgeWeeks } from '../judge/judge'
import { dateSchema, idSchema } from './payloads'

/** The digests of one building's week, and their mail. */
export const writeDigestsJob = defineJob({
  task: 'write-digests',
  payload: z.object({ buildingId: idSchema, weekStart: dateSchema }),
  run: async ({ buildingId, weekStart }, { database, clock }) => {
    // a letter is sent once, so its week is judged by the newest of what is stored
    const sunday = addDays(weekStart, 6)
    await judgeWeeks({ database, clock, buildingId, fromDate: sunday, toDate: sunday })
    await writeDigests({ database, clock, buildingId, weekStart, mails: true })
  },
})

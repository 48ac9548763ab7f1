import { z } from 'zod'
import { defineJob } from '../job'
import { watchSensors } from '../watch/silent'
import { idSchema } from './payloads'

/** Which placed sensors of a building have fallen silent, by their own interval. */
export const watchSensorsJob = defineJob({
  task: 'watch-sensors',
  payload: z.object({ buildingId: idSchema }),
  run: ({ buildingId }, { database, clock }) => watchSensors({ database, clock, buildingId }),
})

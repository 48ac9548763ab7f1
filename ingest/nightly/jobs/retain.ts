import { env } from '@/lib/server/env'
import { log } from '@/lib/server/log'
import type { ScheduledJob } from '../job'
import { archiveDirOf, retain } from '../retention/retain'

export const retainJob: ScheduledJob = {
  task: 'retain',
  run: async ({ database, clock, stopped }) => {
    const settings = env()
    const { readings, rollups, months } = await retain({
      ...{ database, clock, stopped },
      defaults: {
        readingsKeptDays: settings.EBBMARK_READINGS_KEPT_DAYS ?? null,
        rollupsKeptDays: settings.EBBMARK_ROLLUPS_KEPT_DAYS ?? null,
      },
      archiveDir: settings.EBBMARK_ARCHIVE === 'csv' ? archiveDirOf(settings.EBBMARK_DATA_DIR) : null,
    })
    if (readings + rollups + months.length > 0)
      log().info({ readings, rollups, months }, 'let go of what is kept no longer')
  },
}

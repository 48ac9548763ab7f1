import { diskSays, readDisk } from '@/lib/server/disk'
import { log } from '@/lib/server/log'
import type { ScheduledJob } from '../job'

/** Warns in the log while there is still time to make room. */
export const watchDiskJob: ScheduledJob = {
  task: 'watch-disk',
  run: async () => {
    const disk = await readDisk()
    if (!disk || disk.state === 'ample') return
    log()[disk.state === 'full' ? 'error' : 'warn'](
      { freeBytes: disk.freeBytes, freePct: Math.round(disk.freePct) },
      `the disk of the data folder is ${diskSays(disk)}: make room, or shorten what is kept (EBBMARK_READINGS_KEPT_DAYS)`,
    )
  },
}

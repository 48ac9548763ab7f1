import type { ScheduledJob } from '../job'
import { analyseHistoryJob } from './analyse-history'
import { analyseNightJob } from './analyse-night'
import { judgeWeeksJob } from './judge-weeks'
import { makeMonthsJob } from './make-months'
import { pruneJob } from './prune'
import { retainJob } from './retain'
import { rollUpJob } from './roll-up'
import { sendDigestJob } from './send-digest'
import { tickJob } from './tick'
import { watchDiskJob } from './watch-disk'
import { watchSensorsJob } from './watch-sensors'
import { writeDigestsJob } from './write-digests'

/** Jobs that are queued with a payload: by the tick, by one another, by the web application. */
export const queuedJobs = [
  analyseNightJob,
  analyseHistoryJob,
  judgeWeeksJob,
  writeDigestsJob,
  sendDigestJob,
  watchSensorsJob,
] as const

/** Jobs that the schedule starts. */
export const scheduledJobs: readonly ScheduledJob[] = [
  tickJob,
  rollUpJob,
  retainJob,
  makeMonthsJob,
  pruneJob,
  watchDiskJob,
]

/** When a job starts by itself. Cron is UTC, so nothing here may depend on a building's local time: the tick does that. */
export type Scheduled = { task: string; cron: string; says: string }

export const schedule: readonly Scheduled[] = [
  { task: 'tick', cron: '*/10 * * * *', says: 'queues nights, digests and sensor checks that are due' },
  { task: 'roll-up', cron: '*/5 * * * *', says: 'rolls new and late readings up' },
  { task: 'retain', cron: '23 1 * * *', says: 'lets go of readings and roll-ups that are kept no longer' },
  { task: 'watch-disk', cron: '*/10 * * * *', says: 'warns before the disk is full' },
  { task: 'make-months', cron: '17 2 * * *', says: 'makes the coming months of readings' },
  { task: 'prune', cron: '41 3 * * *', says: 'removes ended sessions and old sign-in attempts' },
]

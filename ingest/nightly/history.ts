/** One-shot process: analyses every missing night of every building up to yesterday, prints how far it is, ends with 0. */
import { systemClock } from '@/lib/server/clock'
import { database } from '@/lib/server/database'
import { catchUp } from './catch-up'

let ending = false
for (const signal of ['SIGTERM', 'SIGINT'] as const) {
  process.once(signal, () => {
    ending = true
  })
}
process.on('disconnect', () => process.exit(1))

catchUp({
  database: database(),
  clock: systemClock,
  say: (line) => process.stdout.write(`${line}\n`),
  stopped: () => ending,
})
  .then(() => database().close())
  .then(
    () => {
      process.exitCode = ending ? 130 : 0
      if (process.connected) process.disconnect()
    },
    (error) => {
      process.stderr.write(
        `the history was not analysed: ${error instanceof Error ? error.message : error}\n`,
      )
      process.exit(1)
    },
  )
